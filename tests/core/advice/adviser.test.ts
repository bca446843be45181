import { describe, expect, it } from 'vitest'
import { createAdviser, type SegmentForAdvice } from '../../../server/core/advice/adviser.ts'
import type { AlarmChange, Occurrence } from '../../../server/core/alarms/occurrence.ts'
import { MonitorError } from '../../../server/core/errors.ts'
import { planFlush } from '../../../server/core/flush/plan.ts'
import { actions, alarmKinds, type Cause, causes, type Priority } from '../../../server/core/report.ts'
import { heron } from '../../helpers/skids.ts'

const skid = heron()
const minute = 60_000
const startMs = Date.UTC(2031, 0, 6)
const planner = (segment: string, ratios: Readonly<Record<string, number | null>>) =>
  planFlush({ skid, segments: [segment], ratios })
/** Minutes that displacing and rinsing R1 take: F0 and F1 of its plan. */
const displace = planner('R1', { R1: 1.2 })
  .steps.filter((s) => s.id === 'F0' || s.id === 'F1')
  .reduce((a, s) => a + (s.minutes ?? 10), 0)
const margin = 15

const forecast = (lowMin: number, highMin = 2 * lowMin) => ({
  limit: 'dpHighBar' as const,
  atMs: startMs + 1.4 * lowMin * minute,
  lowMs: startMs + lowMin * minute,
  highMs: startMs + highMin * minute,
  level: 0.8,
})
const segment = (over: Partial<SegmentForAdvice> = {}): SegmentForAdvice => ({
  id: 'R1',
  kind: 'reactor',
  ratio: 1.2,
  growth: { onset: null, forecast: null, raisedMs: startMs },
  ...over,
})
const raised = (over: Partial<Occurrence>): AlarmChange => ({
  kind: 'raised',
  tMs: startMs,
  occurrence: {
    id: 1,
    key: 'x',
    kind: 'fouling',
    priority: 'medium',
    segment: 'R1',
    tag: null,
    raisedMs: startMs,
    clearedMs: null,
    value: 1.1,
    limit: 1,
    unit: 'ratio',
    message: 'R1',
    cause: 'fouling',
    onset: null,
    detector: 'growth likelihood',
    evidence: { for: [], against: [], notExcluded: [] },
    configuration: 0,
    annunciated: true,
    ...over,
  },
})
/** Steps of half a minute with a forecast that stands; every advice with its minute. */
function through(minutes: number, of: (minute: number) => readonly SegmentForAdvice[]) {
  const adviser = createAdviser(undefined, planner)
  const said: { readonly minute: number; readonly action: string; readonly plan: unknown }[] = []
  for (let t = 0; t <= minutes; t += 0.5)
    for (const a of adviser.step(startMs + t * minute, of(t))) said.push({ minute: t, action: a.action, plan: a.plan })
  return said
}

describe('a flush', () => {
  it('is advised before forecast.low less the time of its plan less 15 min, by half an hour (to the step), once, after one advice to watch', () => {
    const low = 300
    const said = through(280, () => [segment({ growth: { onset: null, forecast: forecast(low), raisedMs: startMs } })])
    expect(said.map((s) => s.action)).toEqual(['watch', 'flush'])
    const last = low - displace - margin
    expect(said[0]!.minute).toBe(0)
    expect(last - said[1]!.minute).toBeGreaterThan(29.5)
    expect(last - said[1]!.minute).toBeLessThanOrEqual(30)
  })

  it('is advised at once, with its plan and a word on the hurry, where less than that is left', () => {
    const adviser = createAdviser(undefined, planner)
    const [advice] = adviser.step(startMs, [segment({ growth: { onset: null, forecast: forecast(10), raisedMs: startMs } })])
    expect(advice).toMatchObject({ action: 'flush', segments: ['R1'] })
    expect(advice!.reason).toContain('may take longer than is surely left')
    expect(advice!.plan!.steps.map((s) => s.id)).toEqual(expect.arrayContaining(['F0', 'F1', 'F2']))
    for (const s of advice!.plan!.steps) expect(s.endsWhen.length + s.holdPoints.length).toBeGreaterThan(0)
  })

  it('is said again only when its forecast has moved by 30 % of the time left and half an hour has passed', () => {
    const standing = { onset: null, forecast: forecast(40, 200), raisedMs: startMs }
    const moved = { ...standing, forecast: { ...forecast(40, 200), lowMs: startMs + 200 * minute } }
    expect(through(60, () => [segment({ growth: standing })]).map((s) => s.action)).toEqual(['flush'])
    const said = through(100, (t) => [segment({ growth: t < 20 ? standing : moved })])
    expect(said.map((s) => [s.minute, s.action])).toEqual([[0, 'flush'], [30, 'flush']]) // biome-ignore format: a table
  })

  it('is never advised on a clean run of three days', () => {
    expect(through(3 * 24 * 60, () => [segment({ growth: null, ratio: 1 })])).toEqual([])
  })

  it('of a growth that ended is forgotten: the next growth begins with its own advice', () => {
    const growth = { onset: null, forecast: null, raisedMs: startMs }
    const said = through(60, (t) => [segment({ growth: t < 20 || t > 40 ? growth : null })])
    expect(said.map((s) => s.action)).toEqual(['watch', 'watch'])
  })

  it('for a filter is to change it, once, and never a flush', () => {
    const filter = segment({ id: 'F', kind: 'filter', growth: { onset: null, forecast: forecast(10), raisedMs: startMs } })
    expect(through(60, () => [filter]).map((s) => s.action)).toEqual(['change-filter'])
  })

  it('whose plan cannot be computed is advised all the same, and says why there is none', () => {
    const adviser = createAdviser(undefined, () => {
      throw new MonitorError('FLUID_RANGE', 'viscosity of nothing')
    })
    const [advice] = adviser.step(startMs, [segment({ growth: { onset: null, forecast: forecast(20), raisedMs: startMs } })])
    expect(advice).toMatchObject({ action: 'flush', plan: null })
    expect(advice!.reason).toContain('viscosity of nothing')
  })
})

describe('an alarm that no flush cures', () => {
  const advise = (over: Partial<Occurrence>, standing: readonly SegmentForAdvice[] = [segment({ growth: null })]) =>
    createAdviser(undefined, planner)
      .raised(raised(over), standing)
      .map((a) => a.action)

  it('of a sensor, gas, composition or back-pressure cause never calls for a flush, whatever its kind', () => {
    for (const cause of [
      'sensor',
      'gas',
      'composition',
      'back-pressure',
      'pump',
      'ice',
      'unknown',
    ] as const satisfies readonly Cause[])
      for (const kind of alarmKinds)
        for (const priority of ['low', 'medium', 'high'] as const satisfies readonly Priority[])
          expect(advise({ kind, cause, priority })).not.toContain('flush')
    expect(causes).toContain('gas')
  })

  it('gets its own check: composition the flow, a plug and an exotherm stop the feed, a sensor itself, outlet pressure the outlet', () => {
    expect(advise({ cause: 'composition' })).toEqual(['check-flow'])
    expect(advise({ cause: 'blockage' })).toEqual(['stop-feed'])
    expect(advise({ cause: 'back-pressure' })).toEqual(['check-outlet'])
    expect(advise({ cause: 'ice' })).toEqual(['stop-cooling'])
    expect(advise({ kind: 'exotherm', cause: null })).toEqual(['stop-feed'])
    expect(advise({ kind: 'sensor', cause: 'sensor' })).toEqual(['check-sensor'])
    expect(advise({ kind: 'pressure-limit', cause: null })).toEqual(['check-outlet'])
    expect(advise({ kind: 'feed-ratio', cause: null })).toEqual(['check-flow'])
    expect(advise({ kind: 'dp-limit', cause: 'unknown', priority: 'high' })).toEqual(['stop-feed'])
    for (const kind of alarmKinds) for (const a of advise({ kind })) expect(actions).toContain(a)
  })

  it('a ΔP limit reached calls for a flush only where a deposit stands, and not twice', () => {
    const grown = segment({ growth: { onset: null, forecast: null, raisedMs: startMs } })
    expect(advise({ kind: 'dp-limit', cause: 'fouling' }, [grown])).toEqual(['flush'])
    expect(advise({ kind: 'dp-limit', cause: 'unknown' }, [segment({ growth: null })])).toEqual([])
    const adviser = createAdviser(undefined, planner)
    expect(adviser.raised(raised({ kind: 'dp-limit' }), [grown])).toHaveLength(1)
    expect(adviser.raised(raised({ kind: 'dp-limit' }), [grown])).toEqual([])
  })

  it('cleared or amended calls for nothing', () => {
    const adviser = createAdviser(undefined, planner)
    expect(adviser.raised({ ...raised({ kind: 'exotherm' }), kind: 'cleared' }, [])).toEqual([])
    expect(adviser.raised({ ...raised({ kind: 'exotherm' }), kind: 'amended' }, [])).toEqual([])
  })
})
