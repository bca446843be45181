import { describe, expect, it } from 'vitest'
import { checkSkid } from '../../server/skid/check.ts'
import { base, broken } from './base.ts'

const said = (text: string) => checkSkid(text, 'x').problems.map((p) => `${p.line}:${p.column} ${p.message}`)

describe('what is missing is told at the group that lacks it', () => {
  it.each([
    ['skid: plover\n', '', ["1:1 'skid' is missing"]],
    [
      'quantity: pressure, unit: bar, range: [0, 25], accuracyPct: 0.1',
      'range: [0, 25]',
      ["13:5 'quantity' is missing in tags[0]"],
    ],
    ['    kind: filter\n', '', ["53:5 'kind' is missing in segments[1]"]],
    ['    streams: [A, B]\n    dpTag', '    dpTag', ["53:5 'streams' is missing in segments[1]"]],
    ['    dpTag: PDT-3\n', '', ['53:5 segment F1 has no pressures']],
    ['    pressureOut: PT-2\n', '', ['35:5 segment R1 has pressureIn without pressureOut']],
    ['    pressureIn: PT-1\n', '', ['35:5 segment R1 has pressureOut without pressureIn']],
    ['    flowTag: FT-1\n', '', ["22:5 'flowTag' is missing in streams[0]"]],
    ['name: thiophene, ', '', ["26:14 'name' is missing in reagent"]],
    ['low: 0.95, ', '', ["51:18 'low' is missing in feedRatio"]],
    ['solvent: hexane, ', '', ["29:24 'solvent' is missing in mixture[0]"]],
    [', enthalpyKJMol: -160', '', ["52:15 'enthalpyKJMol' is missing in reaction"]],
  ])('%j → %j', (from, to, expected) => {
    expect(said(broken(from, to))).toEqual(expected)
  })

  it('names every stream of a feed ratio that has no reagent, and says what to add', () => {
    const text = base.replace(/ {4}reagent: .*\n/g, '')
    const { problems } = checkSkid(text, 'x')
    expect(problems.map((p) => p.message)).toEqual([
      "of[0] names stream 'B', which has no reagent",
      "of[1] names stream 'A', which has no reagent",
    ])
    expect(problems[1]?.hint).toBe('add reagent: { name: …, concentrationMolL: … } to stream A')
  })

  it('takes a key without a value as a slip, and an explicit null on an optional key as left out', () => {
    expect(said(broken('volumeMl: 60', 'volumeMl:'))).toEqual(['43:14 volumeMl is empty'])
    expect(said(broken('fouling: { action: plan a flush }', ''))).toEqual(['57:8 alarms is empty'])
    expect(said(broken('volumeMl: 60', 'volumeMl: null'))).toEqual([])
    expect(said(broken('kind: filter', 'kind: ~'))).toEqual(['54:11 kind is null'])
  })
})

describe('all at once', () => {
  it('finds eight mistakes of different kinds in one reading, in file order', () => {
    const text = base
      .replace('skid: plover', 'skid: plover!')
      .replace('scanSeconds: 1', 'scanSeconds: 100')
      .replace('unit: kg/h', 'unit: bar')
      .replace('solvent: THF', 'solvent: TFH')
      .replace('pressureIn: PT-1', 'presureIn: PT-7')
      .replace('dpHighHighBar: 8', 'dpHighHighBar: 5')
      .replace('kind: filter', 'kind: sieve')
    expect(said(text)).toEqual([
      "1:7 skid is the text 'plover!'",
      '4:14 scanSeconds is 100',
      "16:44 unit 'bar' does not fit massFlow",
      "24:23 solvent is the text 'TFH'",
      "38:5 unknown key 'presureIn' in segments[0]",
      "38:16 pressureIn names 'PT-7', which is no tag",
      '47:22 dpHighHighBar 5 is not above dpHighBar 6',
      "54:11 kind is the text 'sieve'",
    ])
  })

  it('reads what stands under a misspelt key, so that one slip in `tags` does not make every reference wrong', () => {
    expect(said(base.replace('tags:', 'tag:'))).toEqual(["12:1 unknown key 'tag'"])
  })

  it('tells a mistake behind an anchor once, though two segments share the group', () => {
    const text = base
      .replace('channel: {', 'channel: &bore {')
      .replace('diameterMm: 1.6', 'diameterMm: 0')
      .replace('dpTag: PDT-3', 'dpTag: PDT-3\n    channel: *bore')
    expect(said(text)).toEqual(['42:34 diameterMm is 0'])
  })
})
