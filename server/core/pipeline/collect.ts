import type { AlarmRecord } from '../alarms/alarm-state.ts'
import { alarmReport, type Occurrence } from '../alarms/occurrence.ts'
import { stepScans } from '../derive/step.ts'
import type { Course } from '../flush/course-state.ts'
import { flushReport } from '../flush/flush-report.ts'
import { chartReport } from '../fouling/charts.ts'
import type { BaselineRecord, ForecastRecord, Learned } from '../fouling/watch-state.ts'
import { alarmPerformance } from '../insight/alarm-system.ts'
import { insightOf } from '../insight/insight.ts'
import { createOutletFlow } from '../insight/outlet-flow.ts'
import { outletOf } from '../insight/outlet-path.ts'
import { gradeOf, reasons } from '../quality/tag-rules.ts'
import type {
  AdviceReport,
  AlarmKind,
  BaselineReport,
  ForecastReport,
  LearnedReport,
  Report,
  SegmentReport,
  TagReport,
  TimelinePoint,
} from '../report.ts'
import { settingUnit } from '../settings/words.ts'
import type { Skid } from '../skid.ts'
import { barFromPa, cFromK, m3sFromMlMin, mlMinFromM3s } from '../units.ts'
import type { PipelineEvent } from './events.ts'
import { onsetReport } from './onset-report.ts'
import type { Pipeline } from './pipeline.ts'

const iso = (ms: number): string => new Date(ms).toISOString()

const forecastReport = (f: ForecastRecord | null): ForecastReport | null =>
  f === null ? null : { limit: f.limit, at: iso(f.atMs), low: iso(f.lowMs), high: iso(f.highMs), level: f.level }

const baselineReport = (b: BaselineRecord): BaselineReport => ({
  from: iso(b.fromMs),
  to: iso(b.toMs),
  dpBar: barFromPa(b.dpPa),
  sigma: b.sigma,
  provisional: b.provisional,
  flowMlMin: b.flowM3S === null ? null : mlMinFromM3s(b.flowM3S),
  tempC: b.tempK === null ? null : cFromK(b.tempK),
  commissioned: b.commissioned ?? false,
})

const learnedReport = (l: Learned | null): LearnedReport | null =>
  l === null
    ? null
    : {
        flowExponent: l.flow,
        viscosityExponent: l.viscosity,
        zeroMbar: l.zeroPa === null ? null : 1000 * barFromPa(l.zeroPa),
      }

/** Alarms whose material is off-specification for as long as they stand, and so has a window at the outlet. */
const disturbs: ReadonlySet<AlarmKind> = new Set<AlarmKind>(['fouling', 'exotherm', 'feed-ratio'])

/**
 * Folds the pipeline's events into the report. Holds what the report holds: alarms with their journal, advice, baselines, a point each 600 s,
 * and the flow at each outlet for a week.
 */
export function createCollector(skid: Skid) {
  const alarms = new Map<number, Occurrence>()
  const baselines = new Map<string, BaselineRecord[]>()
  const advice: AdviceReport[] = []
  const timeline: TimelinePoint[] = []
  const notes: string[] = []
  const records: AlarmRecord[] = []
  const flushes = new Map<number, Course>()
  const stepMs = stepScans(skid.scanSeconds) * skid.scanSeconds * 1000
  const outlets = new Map(skid.segments.map((_, i) => [outletOf(skid, i), createOutletFlow()]))
  return {
    take(events: readonly PipelineEvent[]): void {
      for (const e of events) {
        if (e.kind === 'alarm') alarms.set(e.change.occurrence.id, e.change.occurrence)
        else if (e.kind === 'advice') advice.push(e.advice)
        else if (e.kind === 'transition') records.push(e.record)
        else if (e.kind === 'flush') flushes.set(e.course.flush, e.course)
        else if (e.kind === 'step')
          for (const [i, flow] of outlets) {
            const mlMin = e.segments[i]?.flowMlMin ?? null
            flow.take(e.tMs, stepMs, mlMin === null ? null : m3sFromMlMin(mlMin))
          }
        else if (e.kind === 'note') notes.push(`${iso(e.tMs)} ${e.text}`)
        else if (e.kind === 'timeline')
          for (const p of e.points)
            timeline.push({ at: iso(e.tMs), segment: p.segment, ratio: p.ratio, forecast: forecastReport(p.forecast) })
        else if (e.kind === 'baseline') {
          const list = baselines.get(e.segment) ?? []
          // A provisional baseline is replaced by the one that follows it from the same start.
          if (list.at(-1)?.provisional && list.at(-1)!.fromMs === e.baseline.fromMs) list.pop()
          list.push(e.baseline)
          baselines.set(e.segment, list)
        }
      }
    },

    report(pipeline: Pipeline, extraNotes: readonly string[] = []): Report {
      const view = pipeline.view()
      const { grid: g, skid } = view
      const tags = skid.tags.map((t, i): TagReport => {
        const count = { good: 0, uncertain: 0, bad: 0 }
        const why: Record<string, number> = {}
        reasons.forEach((r, j) => {
          const n = g.judge.counts[i * reasons.length + j]!
          count[gradeOf[r]] += n
          if (n > 0 && r !== 'good') why[r] = n
        })
        return { tag: t.tag, samples: count.good + count.uncertain + count.bad, ...count, reasons: why }
      })
      const insight = insightOf({
        skid,
        nowMs: g.lastRowMs,
        now: view.present.now(),
        segments: skid.segments.map((spec, i) => {
          const { growth, last } = view.segment(i)
          return { baseline: baselines.get(spec.id)?.at(-1) ?? null, ratio: last, growth, atBaseline: view.present.atBaseline(i) }
        }),
        disturbances: [...alarms.values()].filter((o) => o.annunciated && disturbs.has(o.kind)).sort((a, b) => a.id - b.id),
        outletFlow: (i) => outlets.get(outletOf(skid, i))?.samples() ?? [],
      })
      const segments = skid.segments.map((spec, i): SegmentReport => {
        const w = view.segment(i)
        const all = (baselines.get(spec.id) ?? []).map(baselineReport)
        const onset = w.growth?.onset ?? w.hindsight
        return {
          segment: spec.id,
          baseline: all.at(-1) ?? null,
          baselines: all,
          ratio: { last: w.last, max: w.max },
          onset: onset === null ? null : onsetReport(onset),
          growthPerHour: w.growth?.growthPerHour ?? null,
          forecast: forecastReport(w.growth?.forecast ?? null),
          chart:
            w.charts === null
              ? null
              : chartReport(w.charts, skid.detection.riseToFindPct, stepScans(skid.scanSeconds) * skid.scanSeconds),
          deposit: insight.deposits[i] ?? null,
          heat: insight.heat[i] ?? null,
          learned: learnedReport(view.learned(i)),
        }
      })
      return {
        report: 1,
        run: {
          skid: skid.skid,
          from: g.firstMs < 0 ? null : iso(g.firstMs),
          to: g.lastRowMs < 0 ? null : iso(g.lastRowMs),
          scans: g.scans,
          tags,
          rows: { total: g.rows, late: g.lateRows, repeated: g.repeated, outOfOrder: g.outOfOrder, badTime: g.badTime },
          phaseInferred: view.inferred,
          configuration: view.configuration.applied.map(({ version, fromMs, person, reason, changes }) => ({
            version,
            from: fromMs < 0 ? null : iso(fromMs),
            person,
            reason,
            changes: changes.map((c) => ({ path: c.path, unit: settingUnit(skid, c.path), old: c.old, new: c.new })),
          })),
        },
        segments,
        alarms: [...alarms.values()].sort((a, b) => a.id - b.id).map(alarmReport),
        advice,
        timeline,
        notes: [...extraNotes, ...notes],
        streams: insight.streams,
        outlet: insight.outlet,
        flushes: [...flushes.values()].map((c) => flushReport(c.flush === view.flush?.course.flush ? view.flush.course : c)),
        alarmMetrics: g.firstMs < 0 ? null : alarmPerformance(records, g.firstMs, g.lastRowMs + skid.scanSeconds * 1000),
      }
    },
  }
}
export type Collector = ReturnType<typeof createCollector>

/** The report as JSON text: numbers to 9 significant digits, the same text for the same report. */
export function reportText(report: Report, indent = 1): string {
  return `${JSON.stringify(report, (_key, value: unknown) => (typeof value === 'number' ? round9(value) : value), indent)}\n`
}

/** A number to 9 significant digits; −0 becomes 0. */
export function round9(value: number): number | null {
  if (!Number.isFinite(value)) return null
  const r = Number(value.toPrecision(9))
  return r === 0 ? 0 : r
}
