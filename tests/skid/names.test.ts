import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { solventNamed, solvents, solventWords } from '../../server/core/fluids/solvents.ts'
import { timeParser } from '../../server/ingest/csv/time-parse.ts'
import { editDistance, nearest } from '../../server/skid/nearest.ts'
import { timeFormatMend } from '../../server/skid/time-format.ts'

describe('nearest name', () => {
  it('counts edits as published: kitten to sitting 3, CA to ABC 3 (restricted), a swap of neighbours 1', () => {
    // kitten/sitting: the usual textbook example; CA/ABC tells the restricted from the full Damerau-Levenshtein distance (from memory).
    expect(editDistance('kitten', 'sitting')).toBe(3)
    expect(editDistance('CA', 'ABC')).toBe(3)
    expect(editDistance('form', 'from')).toBe(1)
  })
  it('is symmetric, zero only for equal words, and never more than the longer word', () => {
    const word = fc.string({ unit: fc.constantFrom('a', 'b', 'c'), maxLength: 8 })
    fc.assert(
      fc.property(word, word, (a, b) => {
        const d = editDistance(a, b)
        return d === editDistance(b, a) && (d === 0) === (a === b) && d <= Math.max(a.length, b.length)
      }),
      { numRuns: 500, seed: 1 },
    )
  })
  it.each([
    ['dp_high_bar', 'dpHighBar'],
    ['DPHIGHBAR', 'dpHighBar'],
    ['dpHigh', 'dpHighBar'],
    ['preasureIn', 'pressureIn'],
    ['pressurein', 'pressureIn'],
    ['zebra', null],
    ['', null],
    ['x', null],
  ])('%j is %j', (written, meant) => {
    expect(nearest(written, ['dpHighBar', 'dpHighHighBar', 'pressureIn', 'pressureOut'])).toBe(meant)
  })
})

describe('solvents', () => {
  it('has the 18 that a skid file may name, each under one full name', () => {
    expect(new Set(solvents.map((s) => s.name)).size).toBe(18)
    expect(solvents.filter((s) => solventNamed(s.name) !== s)).toEqual([])
  })
  it('takes full and short names in any case, with blanks for hyphens', () => {
    const full = ['THF', 'thf', '2-MeTHF', 'mtbe', 'DCM', 'DMF', 'Dme', 'Diethyl Ether', 'ETHYL-ACETATE', ' toluene '].map(
      (name) => solventNamed(name)?.name,
    )
    // biome-ignore format: one list
    expect(full).toEqual([
      'tetrahydrofuran', 'tetrahydrofuran', '2-methyltetrahydrofuran', 'methyl-tert-butyl-ether', 'dichloromethane', 'dimethylformamide',
      'dimethoxyethane', 'diethyl-ether', 'ethyl-acetate', 'toluene',
    ])
    expect(solventNamed('mercury')).toBeNull()
  })
  it('no short name stands for two liquids', () => {
    expect(new Set(solventWords.map((word) => word.toLowerCase())).size).toBe(solventWords.length)
  })
})

// biome-ignore format: one list
const good = [
  'iso', 'epoch-s', 'epoch-ms', 'elapsed-s', 'time-of-day', 'yyyy-MM-dd HH:mm:ss', 'dd/MM/yyyy HH.mm.ss', "yyyy-MM-dd'T'HH:mm:ss.SSS", 'yyyy-MM-ddTHH:mm:ssZ',
  'd.M.yy H:mm', 'MM/dd/yyyy hh:mm:ss a', 'yyyyMMddHHmmss', 'yyyy-MM-dd HH:mm:ss:SSS', 'HH:mm:ss', 'dd/MM/yyyy',
]
describe('time formats', () => {
  it.each(good)('%j is taken, by the check and by the reader of logs', (format) => {
    expect(timeFormatMend(format)).toBeNull()
    expect(timeParser(format).name.length).toBeGreaterThan(0)
  })
  it('2000 random patterns: what the check takes, the reader of logs takes', () => {
    const words = fc.shuffledSubarray(['yyyy', 'MM', 'dd', 'HH', 'mm', 'ss', 'SSS', 'hh', 'a', 'MMM', 'X'], {
      minLength: 2,
      maxLength: 7,
    })
    const joint = fc.constantFrom('', '-', ':', ' ', "'at'", 'T')
    let taken = 0
    fc.assert(
      fc.property(words, joint, (pieces, between) => {
        const format = pieces.join(between)
        if (timeFormatMend(format) !== null) return
        taken++
        timeParser(format)
      }),
      { numRuns: 2000, seed: 1 },
    )
    expect(taken).toBeGreaterThan(20)
  })
  it.each([
    ['ISO', "'I' is no field"],
    ['yyyy-MM-dd mm', 'hour and minute are needed'],
    ['HH', 'hour and minute are needed'],
    ['ss', 'hour and minute are needed'],
    ['dd/MM HH:mm', 'year, month and day, or none of them'],
    ['yyyy-MM-dd hh:mm', "needs 'a'"],
    ['yyyy-MM-dd HH:mm a', "'a' (am or pm) goes with 'hh'"],
    ['yyyy-mm-dd HH:mm', "'MM' is the month"],
    ['dd MMM yyyy HH:mm', "'MMM' is no field"],
    ['YYYY-MM-DD HH:mm', "'yyyy' for 'YYYY'"],
    ['%d/%m/%Y', 'letters without %'],
    ["yyyy-MM-dd'T", 'close the apostrophe'],
    ['---', 'for example'],
    ['yyyyy-MM-dd HH:mm', "'yyyyy' is no field"],
    ['', 'for example'],
  ])('%j is mended by: %s', (format, mend) => {
    expect(timeFormatMend(format)).toContain(mend)
  })
})
