import { describe, expect, it } from 'vitest'
import { parse } from 'yaml'
import type { Skid } from '../../server/core/skid.ts'
import { checkSkid, loadSkid } from '../../server/skid/check.ts'
import { base, broken } from './base.ts'

const load = (text: string): Skid => loadSkid(text, 'x')
const least = `skid: s1
tags: [{ tag: P, quantity: pressure, unit: kPa }, { tag: F, quantity: volumeFlow, unit: L/h }]
streams: [{ id: A, flowTag: F }]
segments: [{ id: T1, kind: tubing, streams: [A], pressureIn: P, pressureOut: ambient }]
`

describe('a good file becomes a skid with every default filled in', () => {
  it('the least file: what is optional is null, what the contract defaults is its default', () => {
    // biome-ignore format: one object
    expect(load(least)).toEqual({
      skid: 's1', title: 's1', timeZone: 'UTC', scanSeconds: 1, lateSeconds: 2, phaseColumn: null, log: [],
      detection: { falseAlarmDays: 30, riseToFindPct: 5 },
      tags: [
        { tag: 'P', column: 'P', quantity: 'pressure', unit: 'kPa', range: null, accuracyPct: 0.25, accuracyAssumed: true, signal: null, sensor: null, burnout: null, setpointFor: null },
        { tag: 'F', column: 'F', quantity: 'volumeFlow', unit: 'L/h', range: null, accuracyPct: 0.25, accuracyAssumed: true, signal: null, sensor: null, burnout: null, setpointFor: null },
      ],
      streams: [{ id: 'A', title: 'A', flowTag: 'F', fluid: null, waterPpm: null, reagent: null }],
      segments: [
        {
          id: 'T1', title: 'T1', kind: 'tubing', streams: ['A'], dp: { kind: 'held', pressureIn: 'P', outBar: 0, ambient: true }, temperatures: [],
          coolantTemperature: null, channel: null, volumeMl: null, warmUpKPerMin: null, reaction: null,
          limits: { dpHighBar: null, dpHighHighBar: null, pressureHighBar: null, temperatureHighC: null, temperatureHighHighC: null, temperatureLowC: null, flowLow: null, feedRatio: null },
        },
      ],
      alarms: {},
    })
  })

  it('lateSeconds follows scanSeconds as two scans: 10 s for scans of 5 s', () => {
    expect(load(`${least}scanSeconds: 5\n`).lateSeconds).toBe(10)
  })

  it('the base: fluids by full name, two taps, a setpoint in the unit of its tag, a given accuracy', () => {
    const skid = load(base)
    expect(skid.streams.map((s) => s.fluid)).toEqual([
      { kind: 'solvent', solvent: 'tetrahydrofuran' },
      {
        kind: 'mixture',
        parts: [
          { solvent: 'hexane', massFraction: 0.7 },
          { solvent: 'toluene', massFraction: 0.3 },
        ],
      },
      {
        kind: 'table',
        densityKgM3: 940,
        viscosityMPaS: [
          [-20, 1.6],
          [20, 0.85],
        ],
      },
    ])
    expect(skid.segments.map((s) => s.dp)).toEqual([
      { kind: 'taps', pressureIn: 'PT-1', pressureOut: 'PT-2' },
      { kind: 'dp', dpTag: 'PDT-3' },
    ])
    expect(skid.tags.at(-1)).toMatchObject({ tag: 'SP-9', unit: 'degC', setpointFor: 'TT-9' })
    expect(skid.tags[0]).toMatchObject({ column: 'inlet', accuracyPct: 0.1, accuracyAssumed: false, range: [0, 25] })
    expect(skid.segments[0]?.channel).toMatchObject({ diameterMm: 1.6, roughnessUm: 0, heightM: 0, bends: 0, widthMm: null })
    expect(skid.segments[0]?.limits.feedRatio).toEqual({ of: ['B', 'A'], low: 0.95, high: 1.15 })
    expect(skid.alarms).toEqual({ fouling: { action: 'plan a flush' } })
  })

  it('the same file as JSON, as JSON indented with tabs, with CRLF, and with a byte order mark gives the same skid', () => {
    const skid = load(base)
    expect(load(JSON.stringify(parse(base)))).toEqual(skid)
    expect(load(JSON.stringify(parse(base), null, '\t'))).toEqual(skid)
    expect(load(base.replaceAll('\n', '\r\n'))).toEqual(skid)
    expect(load(`\ufeff${base}`)).toEqual(skid)
    expect(checkSkid('\ufeffskad: x', 'x').problems[0]).toMatchObject({ line: 1, column: 1 })
  })

  it("a held outlet is a number of bar; 'ambient' is 0 bar gauge, in JSON too; a number in quotes is a tag", () => {
    const dp = (out: string) => load(least.replace('pressureOut: ambient', `pressureOut: ${out}`)).segments[0]?.dp
    expect(dp('3.5')).toEqual({ kind: 'held', pressureIn: 'P', outBar: 3.5, ambient: false })
    expect(dp('0')).toEqual({ kind: 'held', pressureIn: 'P', outBar: 0, ambient: false })
    expect(dp('"ambient"')).toEqual({ kind: 'held', pressureIn: 'P', outBar: 0, ambient: true })
    const numbered = least
      .replace('tags: [', 'tags: [{ tag: 112, quantity: pressure, unit: bar }, ')
      .replace('pressureOut: ambient', 'pressureOut: "112"')
    expect(load(numbered).segments[0]?.dp).toEqual({ kind: 'taps', pressureIn: 'P', pressureOut: '112' })
  })

  it('text stays text: 010, no, on, 12:30, 1e3, true and dates are not turned into something else', () => {
    for (const word of ['010', 'no', 'on', '12:30', '1e3', '2026-01-01', '0x1F', 'true'])
      expect(load(base.replace('title: Plover bench skid', `title: ${word}`)).title).toBe(word)
    expect(load(base.replace('sensor: K', 'sensor: N')).tags[5]?.sensor).toBe('N')
  })

  it('numbers are decimal: 1.5e1, +3, .5 and 5. are read', () => {
    const volume = (text: string) => load(broken('volumeMl: 60', `volumeMl: ${text}`)).segments[0]?.volumeMl
    expect(['1.5e1', '+3', '.5', '5.'].map(volume)).toEqual([15, 3, 0.5, 5])
  })
})

describe('log: an object, or a list by file pattern', () => {
  const log = (text: string) => load(base.replace(/log:\n(?: {2}.*\n)+/, `log: ${text}\n`)).log
  it('one object fits every file; time may be one column or two, formats one or several', () => {
    expect(load(base).log).toEqual([
      { files: null, time: ['Date', 'Time'], timeFormat: ['dd/MM/yyyy HH.mm.ss'], missing: [-200], clockOffsetSeconds: 0 },
    ])
    expect(log('{ time: t, timeFormat: [iso, epoch-s] }')).toEqual([
      { files: null, time: ['t'], timeFormat: ['iso', 'epoch-s'], missing: [], clockOffsetSeconds: 0 },
    ])
  })
  it('a list names a pattern on each entry but one, and a clock offset in seconds', () => {
    expect(
      log('[{ files: "pump_*.csv", clockOffsetSeconds: -3600 }, { time: t }]').map((l) => [l.files, l.clockOffsetSeconds]),
    ).toEqual([
      ['pump_*.csv', -3600],
      [null, 0],
    ])
  })
})

describe('notes say what is left out or assumed, and are no mistakes', () => {
  const notes = (text: string) => checkSkid(text, 'x').notes
  it('on the least file', () => {
    expect(notes(least)).toEqual([
      'no phaseColumn: production is inferred from flows and temperatures, and shown as inferred',
      'accuracyPct is not given on 2 of 2 tags: 0.25 % of span is assumed',
      "no range on P, F: readings are not checked against the instrument's range",
      'stream A: no fluid: viscosity and density are not taken out, mass flow is left out',
      'segment T1: the outlet is ambient, not measured: its drift is in the interval of the ratio',
      'segment T1: no temperatures: no viscosity correction and no exotherm watch',
      'segment T1: no bore and length of the channel: no clean pressure drop from geometry (it is fitted on the baseline) and no deposit thickness',
      'segment T1: no volumeMl: no residence time',
      'segment T1: no dpHighBar: no forecast and no pressure drop alarm',
    ])
  })
  it.each([
    ['    temperatures: [TT-1]\n', '', 'segment R1: its temperature limits are NOT watched'],
    ['volumeMl: 60', 'volumeMl: 90', 'segment R1: volumeMl is 90, the channel holds 60.3 mL'],
    ['    volumeMl: 60\n', '', "segment R1: no volumeMl: the channel's 60.3 mL is taken"],
    ['    fluid: { solvent: THF }\n', '', 'segment R1: the feed ratio is NOT watched: the fluid of stream A is needed'],
    [
      'concentrationMolL: 1.0, enthalpy',
      'concentrationMolL: 1.2, enthalpy',
      "segment R1: reaction.concentrationMolL 1.2 differs from the reagent's 1 in stream A",
    ],
    ['unit: mbar, range: [0, 2500]', 'unit: mA, range: [0, 2.5]', 'tag PDT-3: its range 0 to 2.5 is taken in bar, at 4 and 20 mA'],
    ['    coolantTemperature: TT-9\n', '', 'segment R1: no coolantTemperature'],
    ['title: Plover', 'title: Another', 'stream C: flows through no segment'],
  ])('%j → %j: %s', (from, to, note) => {
    expect(notes(broken(from, to)).join('\n')).toContain(note)
  })
})
