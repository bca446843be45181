import { MonitorError } from '../errors.ts'
import { type ChannelGeometry, channelVolumeM3 } from '../hydraulics/channel.ts'
import { cleanDp } from '../hydraulics/clean-dp.ts'
import { constrictionOfRatio, thicknessOfRatio, type WorkingPoint } from './thickness.ts'

/** One deposit that would show the ratio seen. */
export interface DepositReading {
  readonly kind: 'uniform' | 'local' | 'plugged-branch'
  /** Share of the length that is covered; 1 for uniform, null for a plugged branch. */
  readonly lengthShare: number | null
  /** What is left of the bore there, 0 to 1; 0 for a plugged branch. */
  readonly boreRatio: number
  readonly thicknessM: number | null
  /** Deposit in all bores; null for a plugged branch (a plug of unknown length). */
  readonly depositM3: number | null
  /** Share of the liquid volume that no longer takes part: by deposit, or behind the plug. It shows in the residence time. */
  readonly volumeLost: number
}

export interface DepositReadings {
  readonly readings: readonly DepositReading[]
  /** What this ratio alone leaves open, and what would tell; sentences for the page. */
  readonly cannotTell: readonly string[]
  readonly couldTell: readonly string[]
}

/**
 * Resistance over clean when `plugged` of n equal branches carry nothing and the flow is the same: ΔP(n - plugged)/ΔP(n) [-]; 2
 * for one of two, laminar. Errors: HYDRAULICS_RANGE unless 0 ≤ plugged < n.
 */
export function pluggedRatio(channel: ChannelGeometry, at: WorkingPoint, plugged: number): number {
  if (!(Number.isInteger(plugged) && plugged >= 0 && plugged < channel.parallel))
    throw new MonitorError('HYDRAULICS_RANGE', `${plugged} of ${channel.parallel} branches cannot be plugged and carry a flow`)
  const friction = (parallel: number): number => {
    const dp = cleanDp({ ...channel, parallel }, at.massFlowKgS, at.rhoKgM3, at.viscPaS)
    return dp.frictionPa + dp.bendPa
  }
  return friction(channel.parallel - plugged) / friction(channel.parallel)
}

const LOCAL_SHARES = [0.1, 0.01] as const

/**
 * The deposits that explain one ratio: a uniform film, constrictions over 10 % and 1 % of the length, and, where branches lie in
 * parallel and the ratio's interval [low, high] holds the value, plugged branches. One ΔP at one flow cannot choose among them;
 * the sentences say what could.
 * Errors: as `thicknessOfRatio` and `pluggedRatio`.
 */
export function depositReadings(
  channel: ChannelGeometry,
  at: WorkingPoint,
  ratio: { readonly value: number; readonly low: number; readonly high: number },
): DepositReadings {
  const volume = channelVolumeM3(channel)
  const radius = channel.diameterM / 2
  const thicknessM = thicknessOfRatio(channel, at, ratio.value)
  const uniformBore = 1 - thicknessM / radius
  const film = (kind: 'uniform' | 'local', lengthShare: number, boreRatio: number): DepositReading => {
    const volumeLost = lengthShare * (1 - boreRatio ** 2)
    return { kind, lengthShare, boreRatio, thicknessM: radius * (1 - boreRatio), depositM3: volume * volumeLost, volumeLost }
  }
  const readings = [
    film('uniform', 1, uniformBore),
    ...LOCAL_SHARES.map((f) => film('local', f, constrictionOfRatio(channel, at, f, ratio.value))),
  ]
  const plugged: number[] = []
  for (let k = 1; k < channel.parallel; k++) {
    const r = pluggedRatio(channel, at, k)
    if (r < ratio.low || r > ratio.high) continue
    plugged.push(k)
    readings.push({
      kind: 'plugged-branch',
      lengthShare: null,
      boreRatio: 0,
      thicknessM: null,
      depositM3: null,
      volumeLost: k / channel.parallel,
    })
  }
  return {
    readings,
    cannotTell: [
      'One pressure drop at one flow does not tell a thin film over the whole length from a narrow place: the same ratio fits both.',
      ...(plugged.length === 0
        ? []
        : [
            `The ratio also fits ${plugged.join(' or ')} of ${channel.parallel} branches plugged: what is in a plugged branch is not displaced by a flush.`,
          ]),
      'Changing the flow does not help while the flow is laminar: every one of these rises in proportion.',
    ],
    couldTell: [
      'A residence-time test: a film shortens it in step with the volume it takes, a narrow place hardly, a plugged branch by its whole share.',
      'Heat transfer: a film over the wall lowers U along the whole segment; a narrow place does not.',
      'Time: a film at a steady rate makes ratio^(-1/4) fall in a straight line; a narrow place or a plug bends it down.',
      ...(channel.parallel > 1 ? ['A plug in one branch comes as a step; its outlet follows the coolant temperature.'] : []),
    ],
  }
}
