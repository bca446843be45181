import type { Signal } from '../alarms/occurrence.ts'
import type { BankEvent } from '../bank/bank-state.ts'
import type { Layout } from '../derive/layout.ts'
import type { ChartReading } from '../fouling/charts.ts'
import { findingOf } from '../fouling/evidence.ts'
import type { WatchEvent } from '../fouling/watch-state.ts'
import type { Interval } from '../growth/points.ts'
import { barFromPa } from '../units.ts'
import { onsetReport } from './onset-report.ts'

/** What one verdict says: an alarm or a note, and how long the alarm stands before it clears by itself, ms; null: until its condition ends. */
export interface Said {
  readonly signal: Signal | null
  readonly note: string | null
  readonly standsMs: number | null
  /** An alarm of the same key that still stands ends first: this is another occurrence. */
  readonly anew: boolean
}

const alarm = (signal: Signal, stands: number | null = null, anew = false): Said => ({ signal, note: null, standsMs: stands, anew })
const note = (text: string): Said => ({ signal: null, note: text, standsMs: null, anew: false })

/** A shift of a stream's viscosity or of a tap is taken into the model; its alarm stands so long, then returns to normal by itself. */
const standsMs = 30 * 60_000

/** What a verdict of the bank says: which alarm, or which note, and the evidence with what the charts say beside it. */
export function verdictSaid(
  layout: Layout,
  e: BankEvent,
  onset: Interval | null,
  ratio: number | null,
  tMs: number,
  charts: (segment: number) => ChartReading | null,
): Said {
  const finding = findingOf(layout, e)
  const beside = e.kind === 'deposit' || e.kind === 'blockage' ? [chartsSay(charts(e.segment))] : []
  const evidence = { for: [...finding.for, ...beside], against: finding.against, notExcluded: finding.notExcluded }
  const base = {
    tMs,
    over: true,
    value: null,
    limit: null,
    unit: null,
    cause: finding.cause,
    onset: null,
    evidence,
    onDelayS: 0,
    offDelayS: 0,
  }
  switch (e.kind) {
    case 'deposit':
    case 'blockage': {
      const seg = layout.segments[e.segment]!.spec
      const began = onset === null ? '' : `, began about ${new Date(onset.atMs).toISOString()}`
      const what =
        seg.kind === 'filter'
          ? 'filter is loading'
          : e.kind === 'blockage'
            ? 'resistance rose at once: bridging or a plug'
            : 'deposit is growing'
      return alarm({
        ...base,
        key: `fouling:${seg.id}`,
        kind: 'fouling',
        segment: seg.id,
        tag: null,
        priority: e.kind === 'blockage' ? 'high' : 'medium',
        value: ratio,
        limit: 1,
        unit: 'ratio',
        message: `${seg.title}: ${what}, resistance ${ratio === null ? '' : ratio.toFixed(3)} times clean${began}`,
        onset: onset === null ? null : onsetReport(onset),
        detector: e.kind === 'blockage' ? 'step likelihood' : 'growth likelihood',
      })
    }
    case 'instrument': {
      const mbar = (e.sizePa / 100).toFixed(0)
      if (e.slight) return note(`${e.tag}: its zero moved by about ${mbar} mbar, within its accuracy; taken into the model`)
      return alarm(
        {
          ...base,
          key: `sensor:${e.tag}:zero`,
          kind: 'sensor',
          segment: layout.segments[e.segment]!.spec.id,
          tag: e.tag,
          priority: 'low',
          value: barFromPa(e.sizePa),
          limit: 0,
          unit: 'bar',
          message: `${e.tag}: its zero ${e.ramp ? 'drifts' : 'shifted'}, by about ${mbar} mbar so far; verdicts allow for it`,
          detector: e.neighbours ? 'tap likelihood' : 'step likelihood',
        },
        4 * standsMs,
        !e.ramp,
      )
    }
    case 'stream': {
      if (e.nearMove) {
        return note(
          `after a step of flow or temperature the viscosity of stream ${layout.streams[e.stream]!.id} was corrected by ${(100 * Math.expm1(e.size)).toFixed(1)} %`,
        )
      }
      const first = layout.segments.find((g) => g.streams.includes(e.stream))
      return alarm(
        {
          ...base,
          key: `fouling:stream:${layout.streams[e.stream]!.id}`,
          kind: 'fouling',
          segment: first?.spec.id ?? null,
          tag: layout.skid.tags[layout.streams[e.stream]!.tag]?.tag ?? null,
          priority: 'low',
          value: Math.exp(e.size),
          limit: 1,
          unit: 'ratio',
          message: `Stream ${layout.streams[e.stream]!.id}: resistance of all its segments changed together by ${(100 * Math.expm1(e.size)).toFixed(1)} %: verify lot and flow reading`,
          detector: 'stream likelihood',
        },
        standsMs,
      )
    }
    case 'step':
      return note(
        `${layout.segments[e.segment]!.spec.id}: resistance stepped by ${(100 * Math.expm1(e.size)).toFixed(1)} %${e.nearMove ? ', with a step of flow or temperature' : ''}; taken into the level`,
      )
  }
}

/** Creeping growth found by the charts of the promise; what neighbours on one stream share is noted, not alarmed. */
export function creepSaid(layout: Layout, e: Extract<WatchEvent, { kind: 'creep' }>, tMs: number): Said {
  const g = layout.segments[e.segment]!.spec
  const d = e.reading.drift!
  if (e.shared) {
    return note(
      `${g.id}: resistance crept to ${e.ratio.toFixed(3)} times clean together with its neighbours: lot, feed or flow reading; its charts begin anew from there`,
    )
  }
  return alarm({
    key: `fouling:${g.id}`,
    tMs,
    over: true,
    kind: 'fouling',
    segment: g.id,
    tag: null,
    priority: 'low',
    value: e.ratio,
    limit: 1,
    unit: 'ratio',
    message: `${g.title}: resistance creeps up, ${e.ratio.toFixed(3)} times clean`,
    cause: g.kind === 'filter' ? 'filter' : 'fouling',
    onset: e.onset === null ? null : onsetReport(e.onset),
    detector: 'cusum and drift',
    evidence: {
      for: [
        `CUSUM ${e.reading.cusum.toFixed(1)} over its interval ${e.reading.h.toFixed(1)}`,
        `rises by ${(100 * d.perHour).toFixed(2)} % an hour (99 %: ${(100 * d.low).toFixed(2)} to ${(100 * d.high).toFixed(2)})`,
      ],
      against: [],
      notExcluded: ['slow drift of an instrument', 'slow change of composition'],
    },
    onDelayS: 0,
    offDelayS: 0,
  })
}

/** Why the resistance of a segment is not judged. */
export function unjudgedText(layout: Layout, segment: number, lacks: 'dp' | 'flow' | 'temperature' | 'signal'): string {
  const g = layout.segments[segment]!
  const tags = (of: readonly number[]): string => of.map((t) => layout.skid.tags[t]?.tag ?? '?').join(', ')
  const why = {
    dp: 'no reading of its pressure drop',
    temperature: `no reading of ${tags([...g.temperatures, ...(g.coolant === null ? [] : [g.coolant])])}, and so no viscosity`,
    flow: `no reading of ${tags(g.streams.map((i) => layout.streams[i]!.tag))}; pressure drop alone does not tell a deposit from more flow`,
    signal: 'its pressure drop or flow is within the noise of the reading',
  }[lacks]
  return `${g.spec.id}: resistance not judged for a quarter of an hour: ${why}`
}

/** What the charts of a segment say beside the verdict. */
function chartsSay(c: ChartReading | null): string {
  if (c === null) return 'charts by the promise: not yet, they need a final baseline'
  const slope = c.drift === null ? 'no drift told apart from none' : `drift ${(100 * c.drift.perHour).toFixed(1)} % an hour`
  return `CUSUM ${c.cusum.toFixed(1)} of ${c.h.toFixed(1)} σ, ${c.cusumOver ? 'agrees' : 'silent so far'}; ${slope}`
}
