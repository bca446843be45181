import type { LimitName } from '../core/sequence.ts'

/** What a page needs of a skid file to draw it. Segments are in flow order. */
export interface SkidFacts {
  readonly skid: string
  readonly title: string
  readonly timeZone: string
  readonly scanSeconds: number
  readonly lateSeconds: number
  /** One point a detector step in ratio trends. */
  readonly stepSeconds: number
  readonly detection: { readonly falseAlarmDays: number; readonly riseToFindPct: number }
  readonly tags: readonly TagFacts[]
  readonly streams: readonly StreamFacts[]
  readonly segments: readonly SegmentFacts[]
}

export interface TagFacts {
  readonly tag: string
  readonly quantity: string
  readonly unit: string | null
  readonly range: readonly [number, number] | null
}

export interface StreamFacts {
  readonly id: string
  readonly title: string
  readonly flowTag: string
  readonly reagent: string | null
  readonly waterPpm: number | null
  /** Moles of its reagent in an hour at a reading of 1 of its flow tag; null where reagent, fluid or unit is not known. */
  readonly molHPerFlowUnit: number | null
}

export interface SegmentFacts {
  readonly id: string
  readonly title: string
  readonly kind: string
  readonly streams: readonly string[]
  /** The segment its outlet leads into, found by the shared tap; null for the last. */
  readonly leadsTo: string | null
  /** On the longest path through the skid; the others are feeds that join it. */
  readonly main: boolean
  /** Share of the main path's volume (residence at equal flow), 0 to 1; null without a volume. */
  readonly share: number | null
  readonly volumeMl: number | null
  readonly channel: { readonly boreMm: number | null; readonly lengthM: number | null; readonly parallel: number } | null
  /** Tags of the pressures at its ends; a held or ambient outlet is a number of bar. */
  readonly pressureIn: string | null
  readonly pressureOut: string | null
  readonly dpTag: string | null
  readonly heldOutBar: number | null
  readonly temperatures: readonly string[]
  readonly coolantTemperature: string | null
  /** As the skid file gives them; those in force are in the live state and in `GET /api/runs/:run/limits`. */
  readonly limits: Readonly<Record<LimitName, number | null>>
  readonly feedRatio: { readonly of: readonly [string, string]; readonly low: number; readonly high: number } | null
}
