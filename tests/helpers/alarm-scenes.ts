import type { AlarmStateName } from '../../server/core/alarms/alarm-state.ts'
import { alarmMetrics } from '../../server/core/alarms/metrics.ts'
import { performanceTable } from '../../server/core/alarms/performance.ts'
import type { AlarmPerformance, AlarmRow, AlarmStory, HandOver } from '../../server/wire/index.ts'
import { alarmOf, t0 } from './scene.ts'

const hour = 3_600_000
export const states: readonly AlarmStateName[] = ['UNACK', 'ACKED', 'RTNUN', 'LUNACK', 'LACKED', 'SHELVED', 'SBD', 'OOS']
const asideWords: Partial<Record<AlarmStateName, AlarmRow['aside']>> = {
  SHELVED: { sinceMs: t0 + 5 * hour, person: 'night lead', logic: null, reason: 'instrument under repair: order 4417' },
  SBD: { sinceMs: t0 + 5 * hour, person: null, logic: 'low flow while the pump is stopped', reason: null },
  OOS: { sinceMs: t0 + 5 * hour, person: 'day engineer', logic: null, reason: 'meter taken out for calibration' },
}

/** An alarm in a state, with all that goes with it. */
export const inState = (id: number, state: AlarmStateName, more: Partial<AlarmRow> = {}): AlarmRow =>
  alarmOf(id, {
    key: `flow:S${id}`,
    kind: 'flow',
    cause: null,
    onset: null,
    value: 4.31,
    limit: 5,
    unit: 'kg/h',
    raisedMs: t0 + 4 * hour + id * 700_000,
    state,
    active: ['UNACK', 'ACKED', 'SHELVED', 'OOS'].includes(state),
    needsAck: ['UNACK', 'RTNUN', 'LUNACK'].includes(state),
    clearedMs: ['RTNUN', 'LUNACK', 'LACKED'].includes(state) ? t0 + 4.9 * hour : null,
    shelvedUntilMs: state === 'SHELVED' ? t0 + 6 * hour + 21 * 60_000 : null,
    aside: asideWords[state] ?? null,
    ...more,
  })

/** Every state in one priority, or in all three. */
export const everyState = (priorities: readonly AlarmRow['priority'][] = ['medium']): AlarmRow[] =>
  priorities.flatMap((priority, p) =>
    states.map((state, i) => inState(1 + p * states.length + i, state, { priority, shelveMaxMin: priority === 'high' ? 0 : 30 })),
  )

/** So many alarms in the last minutes of the scene, the first a high one that is over and acknowledged, the rest of all priorities. */
export const floodOf = (n: number): AlarmRow[] =>
  Array.from({ length: n }, (_, i) =>
    inState(i + 1, i % 4 === 3 ? 'ACKED' : 'UNACK', {
      priority: (['medium', 'low', 'high'] as const)[i % 3]!,
      raisedMs: t0 + 6 * hour - 480_000 + i * 10_000,
      kind: i === 0 ? 'exotherm' : 'pressure-limit',
      unit: 'bar',
      value: 14.2,
      limit: 14,
    }),
  )

export const storyOf = (alarm: AlarmRow, firstOut: AlarmRow): AlarmStory => ({
  alarm,
  firstOut,
  fromMs: alarm.raisedMs - hour / 2,
  toMs: alarm.raisedMs,
  lines: [
    { tMs: alarm.raisedMs - 1_500_000, what: 'act', alarm: null, text: 'drum change 4: A-31 to A-32', person: 'night lead' },
    {
      tMs: alarm.raisedMs - 900_000,
      what: 'change',
      alarm: null,
      text: 'S2 dpHighBar set to 4: agreed at hand-over',
      person: 'night lead',
    },
    { tMs: firstOut.raisedMs, what: 'alarm', alarm: firstOut.id, text: 'S2: Flow low: raised', person: null },
    { tMs: alarm.raisedMs, what: 'alarm', alarm: alarm.id, text: 'S2: Flow resistance rising: raised', person: null },
  ],
})

/** Figures of a night of 12 h in which one alarm chattered, as the server computes them. */
export function performanceOf(): AlarmPerformance {
  const record = {
    alarm: 1, key: 'flow:S1', from: 'NORM', to: 'UNACK', input: 'act', outcome: 'moved', sound: true, priority: 'low', configVersion: '1', value: null, limit: null,
    unit: null, quality: 'good', person: null, logic: null, reason: null, durationS: null, oneShot: false,
  } as const // biome-ignore format: a record
  const calls = Array.from({ length: 14 }, (_, i) => ({
    ...record,
    key: i % 3 === 0 ? 'flow:S2' : 'flow:S1',
    tMs: t0 + hour + i * 25_000,
  }))
  const metrics = alarmMetrics(
    calls.flatMap((c) => [c, { ...c, tMs: c.tMs + 4000, input: 'clr' as const, sound: false }]),
    t0,
    t0 + 6 * hour,
  )
  const names = { 'flow:S1': 'S1: Flow low', 'flow:S2': 'S2: Flow low' }
  return { run: 1, ...metrics, table: performanceTable(metrics, { all: 2, outside: 0 }), names }
}

export function handOverNote(): HandOver {
  const rows = everyState()
  const is = (...names: AlarmStateName[]) => rows.filter((r) => names.includes(r.state))
  return {
    run: 1,
    fromMs: t0 - 6 * hour,
    toMs: t0 + 6 * hour,
    production: true,
    segments: ['S1', 'S2', 'S3', 'S4'].map((segment, i) => ({
      segment,
      ratio: i === 1 ? 1.34 : i === 3 ? null : 1.01,
      limitFromMs: i === 1 ? t0 + 8 * hour : null,
      limitToMs: i === 1 ? t0 + 9 * hour : null,
    })),
    open: [...is('UNACK', 'ACKED', 'RTNUN', 'LUNACK', 'LACKED'), alarmOf(20)],
    shelved: is('SHELVED'),
    suppressed: is('SBD'),
    outOfService: is('OOS'),
    raised: { high: 1, medium: 9, low: 4, over: 6 },
    flush: [{ segment: 'S2', step: 'F1', state: 'started', atMs: t0 + 5.8 * hour, person: 'night lead' }],
    advice: [{ atMs: t0 + 5 * hour, action: 'flush', segments: ['S2'], reason: 'S2: deposit is growing' }],
    gaps: [{ fromMs: t0 + 3.6 * hour, toMs: t0 + 3.7 * hour }],
    gapStepMs: 21_600,
    badTags: [{ tag: 'TT-022', reason: 'frozen' }],
    changes: [
      {
        tMs: t0 + 2 * hour,
        what: 'change',
        alarm: null,
        text: 'S2 dpHighBar set to 4: agreed at hand-over',
        person: 'day engineer',
      },
    ],
    comments: [
      {
        tMs: t0 + 5.9 * hour,
        what: 'comment',
        alarm: null,
        text: 'Hand-over: drum A-31 is nearly empty, the next one stands at the pump',
        person: 'night lead',
      },
      { tMs: t0 + 3 * hour, what: 'comment', alarm: 2, text: 'looked at the pump, no leak', person: 'night lead' },
    ],
  }
}
