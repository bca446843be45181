import type { AlarmChange, Occurrence } from '../alarms/occurrence.ts'
import { MonitorError } from '../errors.ts'
import type { ForecastRecord } from '../fouling/watch-state.ts'
import type { Interval } from '../growth/points.ts'
import type { Action, AdviceReport, FlushPlan } from '../report.ts'
import type { SegmentKind } from '../skid.ts'

export interface AdviserState {
  /** What stands advised for a segment with a deposit; '' for none. */
  advised: Record<string, '' | 'watch' | 'flush' | 'change-filter' | 'stop-feed'>
  /** Minutes that F0 and F1 of a segment's plan take, computed once a deposit stands. */
  displaceMinutes: Record<string, number>
  /** When a flush was last advised for a segment, and the early end of the forecast it rested on. */
  flushed: Record<string, { atMs: number; lowMs: number }>
}

export interface SegmentForAdvice {
  readonly id: string
  readonly kind: SegmentKind
  readonly ratio: number | null
  readonly growth: { readonly onset: Interval | null; readonly forecast: ForecastRecord | null; readonly raisedMs: number } | null
}

/** Computes the flush plan of a segment; ratios of all. May throw a MonitorError: a liquid out of its range, a plan that is refused. */
export type Planner = (segment: string, ratios: Readonly<Record<string, number | null>>) => FlushPlan

/**
 * How much sooner than the last sensible moment a flush is advised: time for a person to decide and prepare. A flush advised is said
 * again, with its new times, when the forecast has moved by a share of the time left and half an hour has passed. Site choice under
 * change control; common practice.
 */
const adviceSettings = { marginMinutes: 15, leadMinutes: 30, againMinutes: 30, againShare: 0.3 } as const

/**
 * When a flush should begin and what else is worth doing, as recommendations under the site's own procedure. A flush is advised before
 * forecast.low − plan time − margin; until that is near the advice is to watch. Causes that no flush cures get their own check.
 */
export function createAdviser(saved: AdviserState | undefined, plan: Planner) {
  const s: AdviserState = saved ?? { advised: {}, displaceMinutes: {}, flushed: {} }

  /** The plan, or why there is none; the advice stands either way. */
  const planNow = (segment: string, all: readonly SegmentForAdvice[]): { plan: FlushPlan | null; without: string } => {
    try {
      return { plan: plan(segment, Object.fromEntries(all.map((x) => [x.id, x.ratio]))), without: '' }
    } catch (cause) {
      if (!(cause instanceof MonitorError)) throw cause
      return { plan: null, without: `; no plan can be computed: ${cause.message}` }
    }
  }

  function hasMoved(id: string, f: ForecastRecord | null, nowMs: number): boolean {
    const last = s.flushed[id]
    if (last === undefined || f === null || nowMs - last.atMs < adviceSettings.againMinutes * 60_000) return false
    return Math.abs(f.lowMs - last.lowMs) > adviceSettings.againShare * Math.max(last.lowMs - last.atMs, f.lowMs - nowMs)
  }

  return {
    state: s,
    step(nowMs: number, segments: readonly SegmentForAdvice[]): AdviceReport[] {
      const out: AdviceReport[] = []
      for (const g of segments) {
        const stands = s.advised[g.id] ?? ''
        if (g.growth === null) {
          if (stands !== '') s.advised[g.id] = ''
          delete s.displaceMinutes[g.id]
          delete s.flushed[g.id]
          continue
        }
        if (g.kind === 'filter') {
          if (stands === '')
            out.push(say(nowMs, 'change-filter', [g.id], `${g.id}: filter is loading${until(g.growth.forecast)}`, null))
          s.advised[g.id] = 'change-filter'
          continue
        }
        const f = g.growth.forecast
        if (stands === 'stop-feed' || (stands === 'flush' && !hasMoved(g.id, f, nowMs))) continue
        if (f !== null) {
          s.displaceMinutes[g.id] ??= minutesOf(planNow(g.id, segments).plan)
          const lastMs = f.lowMs - (s.displaceMinutes[g.id]! + adviceSettings.marginMinutes) * 60_000
          if (nowMs >= lastMs - adviceSettings.leadMinutes * 60_000 || stands === 'flush') {
            const { plan: made, without } = planNow(g.id, segments)
            const when =
              lastMs > nowMs
                ? `best begun before ${iso(lastMs)}`
                : 'a flush may take longer than is surely left; a young forecast is wide, so prepare now and look again as it narrows'
            out.push(say(nowMs, 'flush', [g.id], `${g.id}: deposit grows${until(f)}; ${when}${without}`, made))
            s.advised[g.id] = 'flush'
            s.flushed[g.id] = { atMs: nowMs, lowMs: f.lowMs }
            continue
          }
        }
        if (stands === '') {
          out.push(
            say(
              nowMs,
              'watch',
              [g.id],
              `${g.id}: a deposit has begun to grow${f === null ? '; too early to say how long is left' : until(f)}`,
              null,
            ),
          )
          s.advised[g.id] = 'watch'
        }
      }
      return out
    },

    /** What an alarm that has just been raised calls for, beyond a flush. */
    raised(change: AlarmChange, segments: readonly SegmentForAdvice[]): AdviceReport[] {
      if (change.kind !== 'raised') return []
      const o = change.occurrence
      const action = actionFor(o)
      if (action === null) return []
      const segment = o.segment === null ? [] : [o.segment]
      if (action === 'flush') {
        const g = segments.find((x) => x.id === o.segment)
        if (g === undefined || g.kind === 'filter' || g.growth === null || s.advised[g.id] === 'flush') return []
        s.advised[g.id] = 'flush'
        const { plan: made, without } = planNow(g.id, segments)
        return [say(o.raisedMs, 'flush', segment, `${o.message}: the limit is reached${without}`, made)]
      }
      return [say(o.raisedMs, action, segment, o.message, null)]
    },
  }
}
export type Adviser = ReturnType<typeof createAdviser>

/** The check that a cause asks for (practice sections 1.4, 6, 7). Null: the deposit's own advice covers it. */
function actionFor(o: Occurrence): Action | null {
  switch (o.kind) {
    case 'fouling':
      return o.cause === 'composition'
        ? 'check-flow'
        : o.cause === 'blockage'
          ? 'stop-feed'
          : o.cause === 'back-pressure'
            ? 'check-outlet'
            : o.cause === 'ice'
              ? 'stop-cooling'
              : null
    case 'dp-limit':
      return o.priority === 'high' ? 'stop-feed' : 'flush'
    case 'pressure-limit':
      return 'check-outlet'
    case 'exotherm':
      return 'stop-feed'
    case 'temperature-limit':
      return o.priority === 'high' ? 'stop-feed' : 'check-cooling'
    case 'feed-ratio':
    case 'flow':
      return 'check-flow'
    case 'sensor':
    case 'no-data':
      return 'check-sensor'
    case 'monitor':
      return 'escalate'
  }
}

const say = (nowMs: number, action: Action, segments: readonly string[], reason: string, plan: FlushPlan | null): AdviceReport => ({
  at: iso(nowMs),
  action,
  segments,
  reason,
  plan,
})
const iso = (ms: number): string => new Date(ms).toISOString()
const until = (f: ForecastRecord | null): string =>
  f === null ? '' : `; ${f.limit} is met between ${iso(f.lowMs)} and ${iso(f.highMs)} (${Math.round(100 * f.level)} %)`
/** Minutes from F0 to the end of F1 at least: with those the reagent is out and the deposit has stopped growing. A step of unknown time counts 10. */
function minutesOf(plan: FlushPlan | null): number {
  if (plan === null) return 20
  return plan.steps.filter((x) => x.id === 'F0' || x.id === 'F1').reduce((a, x) => a + (x.minutes ?? 10), 0)
}
