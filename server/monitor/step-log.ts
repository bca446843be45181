import type { StepEntry } from '../core/pipeline/events.ts'
import { cell, type RowBlock, rowBlock } from '../core/reading.ts'
import { type LimitName, limitNames } from '../core/sequence.ts'
import type { RunId } from '../store/keys.ts'
import type { Interval } from '../wire/live.ts'
import type { StepPoint } from '../wire/trend.ts'
import type { MonitorStore } from './needs.ts'

/** What a segment's growth looked like at the end of a step. */
export interface GrowthNow {
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

const stepWidth = (segments: number): number => 1 + segments * channels.length
export const stepTag = (segment: number, channel: StepChannel): number => 1 + segment * channels.length + channels.indexOf(channel)
export const stepsTitle = (run: number): string => `steps of run ${run}`
export const isSteps = (source: string): boolean => source.startsWith('steps of run ')

/** The steps as rows to be stored; what is null is missing. */
export function stepBlock(rows: readonly StepRow[], segments: number): RowBlock {
  const width = stepWidth(segments)
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
      for (const [c, value] of values.entries()) put(1 + i * channels.length + c, value)
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
        growthPerHour: at(stepTag(i, 'growthPerHour')),
        onset: intervalOf(i, 'onset'),
        forecast: limit === undefined || interval === null ? null : { ...interval, limit },
      }
    }),
  }
}

/** Stored steps whose end lies in [fromMs, toMs), oldest first. */
export function readSteps(
  store: Pick<MonitorStore, 'readings'>,
  stepsRun: RunId,
  segments: number,
  fromMs: number,
  toMs: number,
): StepRow[] {
  const width = stepWidth(segments)
  const columns = store.readings.samples(
    stepsRun,
    Array.from({ length: width }, (_, i) => i),
    fromMs,
    toMs,
  )
  return Array.from(columns[0]?.tMs ?? [], (tMs, r) =>
    stepOf(tMs, segments, (c) => (columns[c]!.codes[r] === cell.value ? columns[c]!.values[r]! : null)),
  )
}

export const stepPoint = ({ tMs, production, segments }: StepRow): StepPoint => ({ tMs, production, segments })
