import type { StepEntry } from '../core/pipeline/events.ts'
import { cell, type RowBlock, rowBlock } from '../core/reading.ts'
import { type LimitName, limitNames } from '../core/sequence.ts'
import type { RunId } from '../store/keys.ts'
import type { Interval } from '../wire/live.ts'
import type { StepPoint } from '../wire/trend.ts'
import type { MonitorStore } from './needs.ts'

/** What a segment's growth looked like at the end of a step. */
export interface GrowthNow {
  /** The charts of the promise: CUSUM of either side over its decision interval, 1 is where it signals; null before the final baseline. */
  readonly cusum: number | null
  readonly cusumLow: number | null
  readonly growthPerHour: number | null
  readonly onset: Interval | null
  readonly forecast: (Interval & { readonly limit: LimitName }) | null
}

export interface StepRow {
  readonly tMs: number
  readonly production: boolean
  readonly segments: readonly StepEntry[]
  readonly growth: readonly GrowthNow[]
}

/**
 * Detector steps are kept as a run of their own beside the run they belong to, so that trends of three weeks cost what trends of an
 * hour do. Channel 0 is production (0 or 1), then these for each segment.
 */
const channels = [
  'ratio',
  'dpBar',
  'flowMlMin',
  'tempC',
  'growthPerHour',
  'onsetAtMs',
  'onsetLowMs',
  'onsetHighMs',
  'onsetLevel',
  'limit',
  'limitAtMs',
  'limitLowMs',
  'limitHighMs',
  'limitLevel',
] as const
export type StepChannel = (typeof channels)[number]

/** After those of all segments, in runs of today's build. */
const chartChannels = ['cusum', 'cusumLow'] as const
export type ChartChannel = (typeof chartChannels)[number]

const oldWidth = (segments: number): number => 1 + segments * channels.length
export const stepTag = (segment: number, channel: StepChannel): number => 1 + segment * channels.length + channels.indexOf(channel)
export const chartTag = (segments: number, segment: number, channel: ChartChannel): number =>
  oldWidth(segments) + segment * chartChannels.length + chartChannels.indexOf(channel)
/** Channels of a row of steps; a run that an older build began keeps the width it began with. */
const stepWidth = (segments: number, begunWith: number | null): number =>
  begunWith ?? oldWidth(segments) + segments * chartChannels.length
/** Whether a run's steps hold the statistics of the charts. */
export const hasCharts = (segments: number, width: number | null): boolean => width !== null && width > oldWidth(segments)
export const stepsTitle = (run: number): string => `steps of run ${run}`
export const isSteps = (source: string): boolean => source.startsWith('steps of run ')

/** The steps as rows to be stored, as wide as the run has them; what is null is missing. */
export function stepBlock(rows: readonly StepRow[], segments: number, begunWith: number | null): RowBlock {
  const width = stepWidth(segments, begunWith)
  const block = rowBlock(rows.length, width)
  block.rows = rows.length
  block.codes.fill(cell.missing)
  rows.forEach((row, r) => {
    block.tMs[r] = row.tMs
    const put = (at: number, value: number | null | undefined) => {
      if (value === null || value === undefined || !Number.isFinite(value)) return
      block.values[r * width + at] = value
      block.codes[r * width + at] = cell.value
    }
    put(0, row.production ? 1 : 0)
    row.segments.forEach((s, i) => {
      const g = row.growth[i]
      const f = g?.forecast ?? null
      const values = [
        s.ratio, s.dpBar, s.flowMlMin, s.tempC, g?.growthPerHour, g?.onset?.atMs, g?.onset?.lowMs, g?.onset?.highMs, g?.onset?.level,
        f === null ? null : limitNames.indexOf(f.limit), f?.atMs, f?.lowMs, f?.highMs, f?.level,
      ] // biome-ignore format: a list in the order of the channels
      for (let c = 0; c < values.length; c++) put(1 + i * channels.length + c, values[c])
      if (!hasCharts(segments, width)) return
      put(chartTag(segments, i, 'cusum'), g?.cusum)
      put(chartTag(segments, i, 'cusumLow'), g?.cusumLow)
    })
  })
  return block
}

/** A stored row as a step again; `at` gives a channel's value, null where it was missing. */
function stepOf(tMs: number, segments: number, at: (channel: number) => number | null): StepRow {
  const intervalOf = (i: number, part: 'onset' | 'limit'): Interval | null => {
    const [atMs, lowMs, highMs, level] = (['AtMs', 'LowMs', 'HighMs', 'Level'] as const).map((end) =>
      at(stepTag(i, `${part}${end}`)),
    )
    return atMs == null || lowMs == null || highMs == null || level == null ? null : { atMs, lowMs, highMs, level }
  }
  const index = Array.from({ length: segments }, (_, i) => i)
  return {
    tMs,
    production: at(0) === 1,
    segments: index.map((i) => ({
      ratio: at(stepTag(i, 'ratio')),
      dpBar: at(stepTag(i, 'dpBar')),
      flowMlMin: at(stepTag(i, 'flowMlMin')),
      tempC: at(stepTag(i, 'tempC')),
    })),
    growth: index.map((i) => {
      const limit = limitNames[at(stepTag(i, 'limit')) ?? -1]
      const interval = intervalOf(i, 'limit')
      return {
        cusum: at(chartTag(segments, i, 'cusum')),
        cusumLow: at(chartTag(segments, i, 'cusumLow')),
        growthPerHour: at(stepTag(i, 'growthPerHour')),
        onset: intervalOf(i, 'onset'),
        forecast: limit === undefined || interval === null ? null : { ...interval, limit },
      }
    }),
  }
}

/** Stored steps whose end lies in [fromMs, toMs), oldest first. */
export function readSteps(
  store: Pick<MonitorStore, 'readings' | 'sequence'>,
  stepsRun: RunId,
  segments: number,
  fromMs: number,
  toMs: number,
): StepRow[] {
  const width = stepWidth(segments, store.sequence.count(stepsRun).width)
  const columns = store.readings.samples(
    stepsRun,
    Array.from({ length: width }, (_, i) => i),
    fromMs,
    toMs,
  )
  return Array.from(columns[0]?.tMs ?? [], (tMs, r) =>
    stepOf(tMs, segments, (c) => (columns[c]?.codes[r] === cell.value ? columns[c]!.values[r]! : null)),
  )
}

export const stepPoint = ({ tMs, production, segments, growth }: StepRow): StepPoint => ({
  tMs,
  production,
  segments: segments.map((s, i) => ({ ...s, cusum: growth[i]?.cusum ?? null, cusumLow: growth[i]?.cusumLow ?? null })),
})
