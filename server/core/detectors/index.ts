import { ewmaLimit } from '../design/ewma-design.ts'
import { type CusumConfig, type CusumState, cusum } from './cusum.ts'
import type { Detector } from './detector.ts'
import { type DriftConfig, type DriftState, drift } from './drift.ts'
import { type EwmaConfig, type EwmaState, ewma } from './ewma.ts'

/** A detector with settings that suit a clean segment; the contract test puts each through the same checks. */
interface Entry<C, S> {
  readonly detector: Detector<C, S>
  readonly usual: C
}

const cusumEntry: Entry<CusumConfig, CusumState> = { detector: cusum, usual: { k: 0.5, h: 5, cap: 10, headStart: 0.5 } }
const driftEntry: Entry<DriftConfig, DriftState> = { detector: drift, usual: { windowHours: 4, leastPerHour: 0.2, level: 0.99 } }

/** λ = 0.1 and a thousand readings between false alarms, by `ewmaLimit`. */
const ewmaEntry: Entry<EwmaConfig, EwmaState> = { detector: ewma, usual: { lambda: 0.1, c: ewmaLimit(0.1, 1000) } }

/** Every detector there is, by name. */
export const detectors = { cusum: cusumEntry, drift: driftEntry, ewma: ewmaEntry } as const
