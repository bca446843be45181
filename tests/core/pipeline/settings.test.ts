import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { createCollector, reportText } from '../../../server/core/pipeline/collect.ts'
import type { PipelineEvent } from '../../../server/core/pipeline/events.ts'
import { createPipeline, type PipelineState } from '../../../server/core/pipeline/pipeline.ts'
import type { RowBlock } from '../../../server/core/reading.ts'
import type { Act, Entry } from '../../../server/core/sequence.ts'
import { createConfiguration } from '../../../server/core/settings/configuration.ts'
import { flatten } from '../../../server/core/settings/flat.ts'
import { randomOf } from '../../../server/core/sim/random.ts'
import { randomScenario } from '../../../server/core/sim/random-scenario.ts'
import type { Skid } from '../../../server/core/skid.ts'
import { loadSkid } from '../../../server/skid/check.ts'
import { block, cut, type Row } from '../../helpers/rows.ts'
import { simulatedBlocks } from '../../helpers/simulated-blocks.ts'
import { heron, twoSegments } from '../../helpers/skids.ts'

const person = 'R. Tamsin'
const t0 = Date.UTC(2031, 4, 5)
const at = (s: number): number => t0 + 1000 * s

function play(skid: Skid, entries: Iterable<Entry>, saveAfter: readonly number[] = []) {
  let pipeline = createPipeline(skid)
  const collector = createCollector(skid)
  const events: PipelineEvent[] = []
  const heard = (more: readonly PipelineEvent[]) => {
    events.push(...more)
    collector.take(more)
  }
  let n = 0
  for (const e of entries) {
    heard(pipeline.push(e))
    if (saveAfter.includes(n++)) pipeline = createPipeline(skid, JSON.parse(JSON.stringify(pipeline.save())) as PipelineState)
  }
  heard(pipeline.finish())
  return { pipeline, events, report: collector.report(pipeline), text: reportText(collector.report(pipeline)) }
}
const records = (events: readonly PipelineEvent[]) => events.flatMap((e) => (e.kind === 'transition' ? [e.record] : []))
const act = (a: Act): Entry => ({ kind: 'act', act: a })

describe('settings with versions in a run', () => {
  // 25 minutes of heron with a fault of an instrument: what follows is about the machinery, not about verdicts.
  const skid = heron()
  const run = simulatedBlocks(skid, randomScenario(skid, 'sensor', 6, { hours: 0.4 }), 2000).next().value as RowBlock
  const startMs = run.tMs[0]!

  const settings = (version: number, tMs: number, inS: number, path: string, value: number | string | string[] | null): Act => ({
    kind: 'settings', version, tMs, person, reason: 'trial of other settings', effectiveMs: tMs + 1000 * inS, changes: [{ path, old: null, new: value }],
  }) // biome-ignore format: a list

  const choice = fc.oneof(
    fc.record({
      kind: fc.constant('settings' as const),
      inS: fc.constantFrom(-5, 0, 30, 400),
      change: fc.constantFrom<[string, number | string | string[] | null][]>(
        ['segments.R1.limits.dpHighBar', 0.4], ['segments.R1.limits.temperatureHighC', -60], ['segments.R2.limits.feedRatio.high', 1.1], ['detection.riseToFindPct', 3],
        ['alarms.dp-limit.onDelaySeconds', 2], ['alarms.dp-limit.latching', 'yes'], ['disturbances.wander', 0.004], ['suppression.rest.alarms', ['dp-limit']],
        ['suppression.rest.phases', ['production', 'startup']], ['suppression.rest.phases', null], ['segments.R1.baselineVersion', 7], ['tags.PT-101.column', 'x'], ['streams.A.waterPpm', null],
      ), // biome-ignore format: a list
    }),
    fc.record({ kind: fc.constantFrom('acknowledge' as const, 'shelve' as const, 'unshelve' as const, 'reset' as const), alarm: fc.integer({ min: 1, max: 4 }), reason: fc.constantFrom('', 'pump test under way') }),
    fc.record({ kind: fc.constantFrom('out-of-service' as const, 'in-service' as const), key: fc.constantFrom('dp-limit:R1:dpHighBar', 'flow:R1:flowLow', 'sensor:TT-111'), reason: fc.constantFrom('no', 'gauge is recalibrated') }),
    fc.record({ kind: fc.constant('event' as const), event: fc.constantFrom('Karl Fischer', 'filter change', 'sample'), value: fc.constantFrom(180, -1, null), unit: fc.constantFrom('ppm', 'mL', null), of: fc.constantFrom('A', 'R1', null) }),
    fc.record({ kind: fc.constant('limit' as const), value: fc.constantFrom(0.3, 9, null) }),
  ) // biome-ignore format: a list

  type Choice = typeof choice extends fc.Arbitrary<infer T> ? T : never
  function actOf(c: Choice, version: number, tMs: number): Act {
    switch (c.kind) {
      case 'settings':
        return settings(version, tMs, c.inS, c.change[0], c.change[1])
      case 'shelve':
        return { kind: 'shelve', alarm: c.alarm, reason: c.reason, minutes: 1, person, tMs }
      case 'limit':
        return {
          kind: 'limit',
          segment: 'R1',
          limit: 'dpHighBar',
          value: c.value,
          reason: 'trial of a limit',
          version,
          person,
          tMs,
        }
      case 'event':
        return { ...c, note: '', person, tMs }
      case 'acknowledge':
        return { kind: 'acknowledge', alarm: c.alarm, person, tMs }
      case 'reset':
      case 'unshelve':
        return { kind: c.kind, alarm: c.alarm, reason: c.reason, person, tMs }
      case 'out-of-service':
      case 'in-service':
        return { kind: c.kind, key: c.key, reason: c.reason, person, tMs }
    }
  }

  // REC-06 USR-13 ALM-10
  it('any acts, refused ones too, at any places: played again, cut and resumed from JSON anywhere, the report, the journal and the state are the same to the byte', () => {
    const place = fc.integer({ min: 0, max: run.rows - 1 })
    fc.assert(
      fc.property(
        fc.array(fc.tuple(place, choice), { minLength: 4, maxLength: 10 }),
        fc.array(place, { maxLength: 2 }),
        (acts, saves) => {
          const sorted = acts.toSorted(([a], [b]) => a - b)
          const entriesWith = (more: readonly number[]): Entry[] => {
            const out: Entry[] = []
            let next = 0
            let row = 0
            for (const b of cut(run, [...sorted.map(([p]) => p), ...more])) {
              while (next < sorted.length && sorted[next]![0] <= row) out.push(act(actOf(sorted[next]![1], ++next, run.tMs[row]!)))
              out.push({ kind: 'rows', block: b })
              row += b.rows
            }
            return out
          }
          const whole = play(skid, entriesWith([]))
          const pieces = entriesWith(saves)
          const again = play(skid, pieces, [...pieces.keys()])
          expect(again.text).toBe(whole.text)
          expect(again.pipeline.save()).toEqual(whole.pipeline.save())
          expect(records(again.events)).toEqual(records(whole.events))
          // What is in force at the end is the fold of what took effect.
          const folded = createConfiguration(skid, JSON.parse(JSON.stringify(whole.pipeline.view().configuration)))
          expect(flatten(whole.pipeline.view().skid)).toEqual(flatten(folded.skid()))
        },
      ),
      { numRuns: 4, seed: 21 },
    )
  })

  it('a limit planned for later alarms from its time on and not before, and the alarm and its record name the version', () => {
    const low = settings(3, startMs, 1200, 'segments.R1.limits.dpHighBar', 0.4)
    const { report, events } = play(skid, [act(settings(2, startMs - 1, 0, 'segments.R1.limits.dpHighHighBar', 9)), act(low), { kind: 'rows', block: run }]) // biome-ignore format: a list
    const [alarm] = report.alarms.filter((a) => a.kind === 'dp-limit')
    expect(alarm).toMatchObject({ segment: 'R1', limit: 0.4, configuration: 3 })
    const afterS = (Date.parse(alarm!.raised) - startMs) / 1000
    // On-delay of 15 s.
    expect(afterS).toBeGreaterThanOrEqual(1214)
    expect(afterS).toBeLessThan(1220)
    expect(records(events).find((r) => r.alarm === alarm!.id)!.configVersion).toBe('heron/3')
    expect(report.run.configuration).toEqual([
      { version: 2, from: null, person, reason: 'trial of other settings', changes: [{ path: 'segments.R1.limits.dpHighHighBar', unit: 'bar', old: null, new: 9 }] },
      {
        version: 3, from: new Date(low.tMs + 1_200_000).toISOString(), person, reason: 'trial of other settings',
        changes: [{ path: 'segments.R1.limits.dpHighBar', unit: 'bar', old: null, new: 0.4 }],
      },
    ]) // biome-ignore format: a list
  })

  it('a Karl Fischer result is the water of its stream from then on, in the report with its person, and no version of the settings', () => {
    const kf: Act = {
      kind: 'event',
      event: 'Karl Fischer',
      value: 0.03,
      unit: '%',
      note: 'drum 7',
      of: 'A',
      person,
      tMs: startMs + 60_000,
    }
    const [a, b] = [...cut(run, [100])] as [RowBlock, RowBlock]
    const { report, pipeline } = play(skid, [{ kind: 'rows', block: a }, act(kf), { kind: 'rows', block: b }])
    expect(pipeline.view().skid.streams.find((s) => s.id === 'A')!.waterPpm).toBe(300)
    expect(report.run.configuration.at(-1)).toMatchObject({
      version: null,
      person,
      reason: 'Karl Fischer',
      changes: [{ path: 'streams.A.waterPpm', unit: 'ppm', new: 300 }],
    })
    expect(report.alarms.every((x) => x.configuration === 0)).toBe(true)
  })
})

describe('alarms suppressed by stated logic and out of service', () => {
  const skid = twoSegments('suppression:\n  flush-pressure: { alarms: ["dp-limit:S1"], phases: [flush] }\n')
  const key = 'dp-limit:S1:dpHighBar'
  /** ΔP of S1 5 bar, over its limit of 4, or 1 bar. */
  const row = (s: number, high: boolean, phase: string | null): Row => [at(s), 8, high ? 8 : 4, 3, 2, 20, 20, phase]
  const rows = (from: number, to: number, high: boolean, phase: string | null): Entry => ({
    kind: 'rows',
    block: block(Array.from({ length: to - from }, (_, i) => row(from + i, high, phase)), 7),
  }) // biome-ignore format: a list
  const of = (events: readonly PipelineEvent[]) =>
    records(events).filter((r) => r.key === key).map((r) => [r.input, r.from, r.to, r.sound, r.logic]) // biome-ignore format: a list

  // ALM-09 ALM-05 USR-12
  it('in phase flush the ΔP alarm is tracked under its named logic without sound; when the phase is over and ΔP still high it calls', () => {
    const { events } = play(skid, [
      rows(0, 60, false, 'production'),
      rows(60, 160, true, 'flush'),
      rows(160, 220, true, 'production'),
    ])
    expect(of(events)).toEqual([
      ['sbd+', 'NORM', 'SBD', false, 'flush-pressure'],
      ['act', 'SBD', 'SBD', false, null],
      ['sbd-', 'SBD', 'UNACK', true, 'flush-pressure'],
    ])
    expect(events.flatMap((e) => (e.kind === 'suppression' ? [[(e.tMs - t0) / 1000, e.logic, e.on]] : []))).toEqual([
      [61, 'flush-pressure', true],
      [161, 'flush-pressure', false],
    ])
  })

  it('a log that says no phase for more than a minute suppresses nothing', () => {
    const { events } = play(skid, [rows(0, 60, true, 'flush'), rows(60, 200, true, null)])
    expect(of(events).map((r) => r[0])).toEqual(['sbd+', 'act', 'sbd-'])
    expect(records(events).find((r) => r.input === 'sbd-')!.tMs - t0).toBe(121_000)
  })

  it('logic taken away by a version of the settings lets go at once, and its alarm calls', () => {
    const off: Act = {
      kind: 'settings', version: 2, tMs: at(100), effectiveMs: at(100), person, reason: 'ΔP is to alarm in a flush', changes: [
        { path: 'suppression.flush-pressure.alarms', old: ['dp-limit:S1'], new: null },
        { path: 'suppression.flush-pressure.phases', old: ['flush'], new: null },
      ],
    } // biome-ignore format: a list
    const { events, report } = play(skid, [rows(0, 100, true, 'flush'), act(off), rows(100, 130, true, 'flush')])
    expect(of(events).map((r) => [r[0], r[3]])).toEqual([
      ['sbd+', false],
      ['act', false],
      ['sbd-', true],
    ])
    expect(report.run.configuration.at(-1)!.changes[0]).toMatchObject({ old: ['dp-limit:S1'], new: null })
  })

  // ALM-10 USR-05
  it('out of service by key before it ever alarmed needs a reason of 5 characters; it then only tracks, and calls when it is back in service', () => {
    const oos = (kind: 'out-of-service' | 'in-service', s: number, reason: string): Entry =>
      act({ kind, key, reason, person, tMs: at(s) })
    const { events } = play(skid, [
      oos('out-of-service', 0, 'gone'), oos('out-of-service', 1, 'gauge is recalibrated'), rows(0, 60, true, 'production'), oos('in-service', 61, 'gauge is back'), rows(60, 70, true, 'production'),
    ]) // biome-ignore format: a list
    expect(records(events).filter((r) => r.key === key).map((r) => [r.input, r.outcome, r.from, r.to, r.person])).toEqual([
      ['oos+', 'refused', 'NORM', 'NORM', person],
      ['oos+', 'moved', 'NORM', 'OOS', person],
      ['act', 'tracked', 'OOS', 'OOS', null],
      ['oos-', 'moved', 'OOS', 'UNACK', person],
    ]) // biome-ignore format: a list
  })

  // USR-05
  it('a reset with a reason of 4 characters is refused and journalled; one with 5 resets; one of an older record, without any, does too', () => {
    const latching = { ...skid, alarms: { 'dp-limit': { latching: true } } }
    const ack: Act = { kind: 'acknowledge', alarm: 1, person, tMs: at(100) }
    const resets = (reasons: readonly (string | undefined)[]) => {
      const acts = reasons.map(
        (reason): Entry => act({ kind: 'reset', alarm: 1, person, tMs: at(101), ...(reason === undefined ? {} : { reason }) }),
      )
      const { events } = play(latching, [rows(0, 40, true, 'production'), rows(40, 100, false, 'production'), act(ack), ...acts])
      return records(events).filter((r) => r.input === 'rst').map((r) => [r.outcome, r.to, r.reason]) // biome-ignore format: a list
    }
    expect(resets(['done', 'plug is gone'])).toEqual([
      ['refused', 'LACKED', 'a reason of at least 5 characters is required'],
      ['moved', 'NORM', 'plug is gone'],
    ])
    expect(resets([undefined])).toEqual([['moved', 'NORM', null]])
  })
})

describe('a clean level learnt anew, and another promise', () => {
  const skid = loadSkid(
    `
skid: duo
scanSeconds: 1
phaseColumn: phase
tags:
  - { tag: FT-1, quantity: massFlow, unit: kg/h, range: [0, 20] }
  - { tag: PT-1, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: PT-2, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: TT-1, quantity: temperature, unit: degC, range: [-100, 200] }
streams:
  - { id: A, flowTag: FT-1, fluid: { solvent: THF } }
segments:
  - { id: F1, kind: filter, streams: [A], pressureIn: PT-1, pressureOut: PT-2, temperatures: [TT-1], limits: { dpHighBar: 4 } }
`,
    'duo.yaml',
  )
  const noise = randomOf(5, 'noise')
  // A reading that never moves would be taken for a stuck instrument.
  const reads = (value: number, sd: number) => value + sd * noise.normal()
  const minutes = (from: number, to: number, dp: number): RowBlock => {
    const rows: Row[] = []
    for (let s = 60 * from; s < 60 * to; s++)
      rows.push([at(s), reads(8, 0.01), reads(3 + dp, 0.002), reads(3, 0.002), reads(20, 0.05), 'production'])
    return block(rows, 5)
  }
  const rows = (b: RowBlock): Entry => ({ kind: 'rows', block: b })
  /** A filter changed at 45 min, entered at 48 min: 1 bar before, 0.8 bar after. */
  const [before, unsaid, after] = [minutes(0, 45, 1), minutes(45, 48, 0.8), minutes(48, 90, 0.8)].map(rows) as [Entry, Entry, Entry]
  const F1 = (entries: readonly Entry[]) => play(skid, entries).report.segments[0]!
  const change: Act = {
    kind: 'event',
    event: 'filter change',
    value: null,
    unit: null,
    note: 'cartridge 12',
    person,
    tMs: at(48 * 60),
  }
  const settings = (path: string, now: number): Act => ({
    kind: 'settings', version: 2, tMs: at(48 * 60), effectiveMs: at(48 * 60), person, reason: 'filter of another make', changes: [{ path, old: null, new: now }],
  }) // biome-ignore format: a list

  it.each([
    ['a filter change', change],
    ['a version of the settings that asks for it', settings('segments.F1.baselineVersion', 2)],
  ])(
    'after %s the level of the filter is learnt anew: a second baseline at 0.8 bar from then on, ratio within 0.5 % of 1',
    (_, act) => {
      const f = F1([before, unsaid, { kind: 'act', act }, after])
      expect(f.baselines).toHaveLength(2)
      expect(f.baselines[0]!.dpBar).toBeCloseTo(1, 2)
      expect(f.baselines[1]!.dpBar).toBeCloseTo(0.8, 2)
      expect(Date.parse(f.baselines[1]!.from)).toBeGreaterThanOrEqual(at(47.5 * 60))
      expect(Math.abs(f.ratio.last! - 1)).toBeLessThan(0.005)
    },
  )

  it('without it the one baseline stays at 1 bar, and the fall is taken for a shifted zero of PT-1', () => {
    const { report } = play(skid, [before, unsaid, after])
    expect(report.segments[0]!.baselines.map((b) => b.dpBar.toFixed(2))).toEqual(['1.00'])
    expect(report.alarms.map((a) => [a.kind, a.tag])).toEqual([['sensor', 'PT-1']])
    expect(report.alarms[0]!.message).toContain('its zero shifted')
  })

  it('a false alarm allowed in 300 days in place of 30 has the charts designed anew from then on, with a wider interval; the baseline stays', () => {
    const steady = rows(minutes(48, 60, 1))
    const as = F1([before, steady])
    const then = F1([before, { kind: 'act', act: settings('detection.falseAlarmDays', 300) }, steady])
    expect(as.chart!.designedHours / 720).toBeCloseTo(1, 1)
    expect(then.chart!.designedHours / 7200).toBeCloseTo(1, 1)
    expect(then.chart!.h).toBeGreaterThan(as.chart!.h)
    expect(then.chart!.hours).toBeLessThan(as.chart!.hours)
    expect(then.baselines).toEqual(as.baselines)
  })

  it('an event that cannot be used is kept, and a note says why', () => {
    const kf: Act = { kind: 'event', event: 'Karl Fischer', value: 180, unit: 'ppm', note: '', person, tMs: at(10) }
    const { report, events } = play(skid, [act(kf), rows(minutes(0, 2, 1))])
    expect(report.notes).toEqual([`${new Date(at(10)).toISOString()} Karl Fischer: kept, not used: it names no feed`])
    expect(events[0]).toEqual({ kind: 'act', act: kf })
  })
})
