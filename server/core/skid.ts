import type { Quantity, Unit } from './units.ts'

/** The skid file as checked (`skid/`): the contract's keys, in the file's own units, defaults filled in, every reference resolved. */
export interface Skid {
  readonly skid: string
  readonly title: string
  readonly timeZone: string
  readonly scanSeconds: number
  readonly lateSeconds: number
  readonly phaseColumn: string | null
  readonly log: readonly LogFormat[]
  readonly detection: { readonly falseAlarmDays: number; readonly riseToFindPct: number }
  readonly tags: readonly TagSpec[]
  readonly streams: readonly StreamSpec[]
  readonly segments: readonly SegmentSpec[]
  /** Rationalisation fields by alarm kind or `kind:segment`, merged over the defaults of core/alarms. */
  readonly alarms: Readonly<Record<string, Readonly<Record<string, string | number | boolean>>>>
  /** Suppression by design (ALM-09), by the name of its logic: these alarms are suppressed while the log's phase is one of these. */
  readonly suppression?: Readonly<Record<string, SuppressionSpec>>
  /** Sizes of disturbances over the tool's defaults, by name; core/bank/model.ts says what each is. */
  readonly disturbances?: Readonly<Record<string, number>>
}

export interface SuppressionSpec {
  /** Alarm kinds, or `kind:SEGMENT`. */
  readonly alarms: readonly string[]
  readonly phases: readonly string[]
}

/** How one logger writes. `files` is a glob on the file's name; null fits every file. `time` names one or two columns. */
export interface LogFormat {
  readonly files: string | null
  readonly time: readonly string[] | null
  readonly timeFormat: readonly string[]
  readonly missing: readonly number[]
  /** Added to every time of these files, seconds: the logger's clock was this much behind. */
  readonly clockOffsetSeconds: number
}

export interface TagSpec {
  readonly tag: string
  /** Column in the log; the tag itself where the file gives none. */
  readonly column: string
  readonly quantity: Quantity
  readonly unit: Unit | null
  readonly range: readonly [number, number] | null
  readonly accuracyPct: number
  /** True where the file gave no accuracy and 0.25 % of span is assumed. */
  readonly accuracyAssumed: boolean
  readonly signal: '4-20mA' | null
  readonly sensor: string | null
  readonly burnout: 'high' | 'low' | null
  readonly setpointFor: string | null
}

/** A liquid: one solvent by its full name, a mixture by mass, or the user's own density and viscosity. */
export type FluidSpec =
  | { readonly kind: 'solvent'; readonly solvent: string }
  | { readonly kind: 'mixture'; readonly parts: readonly { readonly solvent: string; readonly massFraction: number }[] }
  | {
      readonly kind: 'table'
      readonly densityKgM3: number
      readonly viscosityMPaS: readonly (readonly [tempC: number, mPaS: number])[]
    }

export interface StreamSpec {
  readonly id: string
  readonly title: string
  readonly flowTag: string
  readonly fluid: FluidSpec | null
  readonly waterPpm: number | null
  readonly reagent: { readonly name: string; readonly concentrationMolL: number } | null
}

export const segmentKinds = ['precooler', 'mixer', 'reactor', 'quench', 'filter', 'tubing'] as const
export type SegmentKind = (typeof segmentKinds)[number]

/** Where a segment's ΔP comes from. */
export type DpSource =
  | { readonly kind: 'taps'; readonly pressureIn: string; readonly pressureOut: string }
  | { readonly kind: 'dp'; readonly dpTag: string }
  | { readonly kind: 'held'; readonly pressureIn: string; readonly outBar: number; readonly ambient: boolean }

export interface ChannelSpec {
  readonly diameterMm: number | null
  readonly lengthM: number | null
  readonly parallel: number
  readonly roughnessUm: number
  readonly wallMm: number | null
  readonly coilDiameterMm: number | null
  readonly heightM: number
  readonly wallConductivityWMK: number | null
  readonly outerFilmWM2K: number | null
  /** A rectangular channel: both sides, instead of `diameterMm`. */
  readonly widthMm?: number | null
  readonly depthMm?: number | null
  /** A ring: the core inside `diameterMm`. */
  readonly coreMm?: number | null
  /** 90-degree bends along one bore, as in a zigzag plate. */
  readonly bends?: number
}

export interface LimitsSpec {
  readonly dpHighBar: number | null
  readonly dpHighHighBar: number | null
  readonly pressureHighBar: number | null
  readonly temperatureHighC: number | null
  readonly temperatureHighHighC: number | null
  readonly temperatureLowC: number | null
  /** In the unit of the flow tag of the segment's first stream. */
  readonly flowLow: number | null
  /** mol/mol of `of[0]` over `of[1]`. */
  readonly feedRatio: { readonly of: readonly [string, string]; readonly low: number; readonly high: number } | null
}

export interface SegmentSpec {
  readonly id: string
  readonly title: string
  readonly kind: SegmentKind
  readonly streams: readonly string[]
  readonly dp: DpSource
  readonly temperatures: readonly string[]
  readonly coolantTemperature: string | null
  readonly channel: ChannelSpec | null
  readonly volumeMl: number | null
  readonly warmUpKPerMin: number | null
  readonly limits: LimitsSpec
  readonly reaction: { readonly limitingStream: string; readonly concentrationMolL: number; readonly enthalpyKJMol: number } | null
  /** The version of the settings that had its baseline learnt anew; missing where none did. */
  readonly baselineVersion?: number
}
