/** Growth of a deposit's thickness over time, 0 at onset and 1 at the limit: see `lawRate`. */
export const growthLaws = ['linear', 'autocatalytic', 'saturating'] as const
export type GrowthLaw = (typeof growthLaws)[number]

/** ignition: fast and narrow. coolant-loss: the whole segment warms. dosing-ratio: one feed runs high. creep: a hot spot walks in slowly. */
export const exothermKinds = ['ignition', 'coolant-loss', 'dosing-ratio', 'creep'] as const
export type ExothermKind = (typeof exothermKinds)[number]

/** frozen, open, dead, spikes: hard, no measurement any more. zeroDrift, zeroStep: soft, a measurement that is wrong. */
export const faultKinds = ['frozen', 'open', 'dead', 'spikes', 'zeroDrift', 'zeroStep'] as const
export type FaultKind = (typeof faultKinds)[number]

interface At {
  /** Hours after the start of the log. */
  readonly atHours: number
}

/** What happens in a simulated run. Sizes in the unit their name ends with; of a sensor fault in the unit of its tag. */
export type SimEvent =
  | (At & {
      readonly kind: 'fouling'
      readonly segment: string
      readonly law: GrowthLaw
      /** From onset to the dP limit at nominal flow and temperature, about: growth is ragged. */
      readonly hoursToLimit: number
      /** Share of the length that narrows; null for all of it. */
      readonly localFraction: number | null
      /** How many times a piece breaks off. */
      readonly sloughs: number
    })
  | (At & {
      readonly kind: 'exotherm'
      readonly segment: string
      readonly what: ExothermKind
      readonly amplitudeC: number
      readonly lastsS: number
      /** dosing-ratio only: which feed, and how many times its flow. */
      readonly stream: string | null
      readonly factor: number
    })
  | (At & { readonly kind: 'flowStep'; readonly factor: number })
  | (At & { readonly kind: 'flowStepOne'; readonly stream: string; readonly factor: number })
  | (At & { readonly kind: 'coolantStep'; readonly degC: number })
  | (At & { readonly kind: 'backPressure'; readonly bar: number; readonly overS: number })
  | (At & { readonly kind: 'gasSlug'; readonly lastsS: number })
  | (At & {
      readonly kind: 'feedConcentration'
      readonly stream: string
      readonly viscosityFactor: number
      readonly heatFactor: number
    })
  /** The pump delivers less and less: factor in the end. */
  | (At & { readonly kind: 'pumpSlip'; readonly stream: string; readonly factor: number; readonly overS: number })
  /** recovery: share of the deposit's rise that is gone afterwards. Growth ends; `startupMinutes` follow. */
  | (At & { readonly kind: 'flush'; readonly minutes: number; readonly recovery: number; readonly startupMinutes: number })
  | (At & { readonly kind: 'filterChange'; readonly segment: string })
  | (At & {
      readonly kind: 'sensor'
      readonly tag: string
      readonly fault: FaultKind
      /** null: to the end of the log. */
      readonly lastsHours: number | null
      readonly size: number
      readonly overS: number
    })
  | (At & { readonly kind: 'nanGap'; readonly minutes: number; readonly tags: readonly string[] | 'all' })

export type EventKind = SimEvent['kind']
type OfKind<K extends EventKind> = Extract<SimEvent, { kind: K }>

/** A whole simulated run. The same scenario on the same skid gives the same rows. */
export interface Scenario {
  readonly name: string
  readonly category: string
  readonly seed: number
  readonly hours: number
  readonly fromMs: number
  readonly logSeconds: number
  /** Hold and start-up before production; 0: the log begins in production. */
  readonly startupMinutes: number
  readonly shutdownMinutes: number
  /** Flow of each stream in the unit of its flow tag; null or absent: chosen so that clean dP is about 0.42 of the tightest limit. */
  readonly flows: Readonly<Record<string, number>> | null
  readonly coolantC: number | null
  /** Scales every disturbance and noise; 1 as documented in disturbances.ts and instruments.ts, 0 none. */
  readonly noise: number
  readonly dirt: Dirt
  readonly events: readonly SimEvent[]
}

/** What a bad logger does to the file, as shares of rows; jitter is the sd of the time stamp in ms. */
export interface Dirt {
  readonly jitterMs: number
  readonly missing: number
  readonly duplicate: number
  readonly outOfOrder: number
  readonly broken: number
}

const cleanFile: Dirt = { jitterMs: 0, missing: 0, duplicate: 0, outOfOrder: 0, broken: 0 }

/** A quiet run of so many hours from 2031-05-05T18:00Z with a row a second; give what differs. */
export const scenarioOf = (over: Partial<Scenario> & Pick<Scenario, 'hours' | 'seed'>): Scenario => ({
  name: `sim-${over.seed}`,
  category: 'clean',
  fromMs: Date.UTC(2031, 4, 5, 18),
  logSeconds: 1,
  startupMinutes: 0,
  shutdownMinutes: 0,
  flows: null,
  coolantC: null,
  noise: 1,
  dirt: cleanFile,
  events: [],
  ...over,
})

export const eventsOf = <K extends EventKind>(scenario: Scenario, kind: K): OfKind<K>[] =>
  scenario.events.filter((e): e is OfKind<K> => e.kind === kind).sort((a, b) => a.atHours - b.atHours)

export const hoursMs = (hours: number): number => Math.round(hours * 3600) * 1000
export const timeOf = (scenario: Scenario, event: At): number => scenario.fromMs + hoursMs(event.atHours)
export const endOf = (scenario: Scenario): number => scenario.fromMs + hoursMs(scenario.hours)
