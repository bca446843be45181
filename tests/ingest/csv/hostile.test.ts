import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { MonitorError } from '../../../server/core/errors.ts'
import { bytesOf, logFormat, type Read, read, skidOf, tag, utf16 } from './helpers.ts'

const skid = skidOf([tag('PT-1'), tag('XV', { quantity: 'state', unit: null })], {
  phaseColumn: 'phase',
  timeZone: 'Europe/Amsterdam',
  log: [logFormat({ missing: [-200] })],
})
const rows = Array.from({ length: 30 }, (_, i) => `2031-10-26 02:${10 + i}:00.5;${i},25;"a;""${i % 3}""";hold\r\n`).join('')
const text = `time;PT-1;XV;phase\r\n;bar;;\r\n${rows}`
const files = [bytesOf(text), utf16(`\ufeff${text}`, false), utf16(text, true)]

/** The rows or the one line of the mistake; anything else thrown fails the test. */
function outcome(file: Uint8Array, cuts: readonly number[]): Read | string {
  try {
    return read(file, skid, { cuts, startMs: 0 })
  } catch (e) {
    if (!(e instanceof MonitorError)) throw e
    expect(e.line()).not.toMatch(/[\r\n]/)
    return `${e.code} ${e.line()}`
  }
}

describe('hostile bytes', () => {
  it('a log with bytes changed, cut out or put in gives rows or one MonitorError, the same at any cut, and no NaN or infinity', () => {
    const edit = fc.record({ at: fc.nat(4000), drop: fc.nat(40), put: fc.uint8Array({ maxLength: 6 }) })
    fc.assert(
      fc.property(
        fc.constantFrom(...files),
        fc.array(edit, { minLength: 1, maxLength: 4 }),
        fc.array(fc.nat(5000), { maxLength: 6 }),
        (file, edits, where) => {
          let bytes = [...file]
          for (const e of edits) bytes = bytes.toSpliced(e.at % (bytes.length + 1), e.drop, ...e.put)
          const broken = Uint8Array.from(bytes)
          const whole = outcome(broken, [])
          expect(outcome(broken, where.map((c) => c % (broken.length + 1)).sort((a, b) => a - b))).toEqual(whole) // biome-ignore format: one line
          if (typeof whole === 'string') return
          expect(whole.t.every(Number.isFinite)).toBe(true)
          expect(whole.values.flat().every((v) => v === null || Number.isFinite(v))).toBe(true)
          expect(whole.tally.rows).toBe(whole.tally.used + whole.tally.broken + whole.tally.outside + whole.tally.foreign)
        },
      ),
      { numRuns: 400, seed: 51 },
    )
  })
  it('any bytes at all give rows or one MonitorError', () => {
    fc.assert(
      fc.property(
        fc.oneof(
          fc.uint8Array({ maxLength: 300 }),
          fc.string({ maxLength: 300, unit: 'binary' }).map((s) => bytesOf(`time,PT-1\n${s}`)),
        ),
        (bytes) => {
          const whole = outcome(bytes, [])
          expect(typeof whole === 'string' || whole.tally.rows > 0).toBe(true)
        },
      ),
      { numRuns: 500, seed: 52 },
    )
  })
  it('a log of 240 kB, past the first window, reads alike in pieces of 1 to 100,000 bytes, in four encodings', () => {
    const many =
      `time;PT-1;XV;phase\n${Array.from({ length: 6000 }, (_, i) => `${1_900_000_000 + i};${i / 8};${i % 7 === 0 ? '"x\ny"' : 'µ'};hold\n`).join('')}`.replaceAll(
        '.',
        ',',
      )
    const latin = Uint8Array.from(many, (c) => c.charCodeAt(0))
    const first = read(bytesOf(many), skid)
    expect([first.t.length, first.tally.broken, first.values[0]![4001]]).toEqual([6000, 0, 500.125])
    for (const file of [bytesOf(many), utf16(`\ufeff${many}`, true), utf16(many, false), latin]) {
      for (const size of [997, 65_535, 65_537, 100_000]) {
        const cuts = Array.from({ length: Math.ceil(file.length / size) - 1 }, (_, i) => (i + 1) * size)
        const got = read(file, skid, { cuts })
        expect([got.t, got.values, got.words]).toEqual([first.t, first.values, first.words])
      }
    }
  })
})
