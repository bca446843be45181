import type { Fluid } from '../fluids/fluid.ts'
import { rtdOf, smallSoluteDiffusivity } from '../rtd/choose.ts'
import { type PathStep, pathVolume } from '../rtd/path.ts'
import { describeRtd, type Rtd } from '../rtd/rtd.ts'
import type { FlushPath, Leg } from './legs.ts'

export interface Washout {
  /** Whole flush volume, m³; null where the flow, or the volume of an asked segment, is not known. */
  readonly volumeM3: number | null
  /** Volume of the slowest chain itself, in whole flush flow, m³. */
  readonly pathM3: number | null
  /** True where a leg of unknown volume was left out. */
  readonly atLeast: boolean
  readonly basis: readonly string[]
  readonly missing: readonly string[]
}

/**
 * The chain of vessels one feed's flush liquid passes, in volume of the whole flush flow: a leg that carries the share f of it counts V/f.
 * Residence-time models by `rtdOf` for this liquid, flow and temperature, unless one was measured. A leg of unknown volume is left out and named, `unknown`
 * says that an asked one was.
 */
function chainSteps(
  chain: readonly Leg[],
  fluid: Fluid,
  flowM3S: number,
  tempOf: (leg: Leg) => number,
  measured: Readonly<Record<string, Rtd>>,
): { readonly steps: PathStep[]; readonly why: string[]; readonly missing: string[]; readonly unknown: boolean } {
  const steps: PathStep[] = []
  const why: string[] = []
  const missing: string[] = []
  let unknown = false
  for (const leg of chain) {
    const { volumeM3, channel, spec } = leg.op
    if (volumeM3 === null || leg.share === null || leg.share <= 0) {
      const needs = volumeM3 === null ? 'volumeMl or a channel with bore and length' : 'the flow of its streams'
      missing.push(
        leg.asked
          ? `${leg.id}: washout, needs ${needs}`
          : `${leg.id}: left out of every washout, which is a lower bound; needs ${needs}`,
      )
      unknown ||= leg.asked
      continue
    }
    const { rhoKgM3, viscPaS } = fluid.at(tempOf(leg))
    const velocityMS = channel === null ? 0 : (flowM3S * leg.share) / (channel.areaM2 * channel.parallel)
    const tube =
      channel === null || velocityMS <= 0
        ? null
        : {
            diameterM: channel.diameterM,
            lengthM: channel.lengthM,
            coilDiameterM: channel.coilDiameterM,
            velocityMS,
            re: (rhoKgM3 * velocityMS * channel.diameterM) / viscPaS,
          }
    const own = measured[leg.id]
    const chosen =
      own === undefined
        ? rtdOf({ kind: spec.kind, tube, diffusivityM2S: smallSoluteDiffusivity(tempOf(leg), viscPaS) })
        : { rtd: own, why: 'as measured' }
    steps.push({ rtd: chosen.rtd, volume: volumeM3 / leg.share })
    why.push(`${leg.id}: ${describeRtd(chosen.rtd)} (${chosen.why})`)
  }
  return { steps, why, missing, unknown }
}

/** Flush volume until the share r of what lay in the worst chain is still inside; the residence-time models are named in `basis`. */
export function washout(
  path: FlushPath,
  r: number,
  fluid: Fluid,
  flowM3S: number | null,
  tempOf: (leg: Leg) => number,
  measured: Readonly<Record<string, Rtd>>,
): Washout {
  if (flowM3S === null || flowM3S <= 0)
    return { volumeM3: null, pathM3: null, atLeast: false, basis: [], missing: ['washout volume: needs the flush flow'] }
  const chains = path.chains.map((chain) => chainSteps(chain, fluid, flowM3S, tempOf, measured))
  const missing = [...new Set(chains.flatMap((c) => c.missing))]
  if (chains.some((c) => c.unknown) || chains.every((c) => c.steps.length === 0))
    return { volumeM3: null, pathM3: null, atLeast: false, basis: [], missing }
  let volumeM3 = 0
  let pathM3 = 0
  for (const { steps } of chains) {
    if (steps.length === 0) continue
    volumeM3 = Math.max(volumeM3, pathVolume(steps, r))
    pathM3 = Math.max(
      pathM3,
      steps.reduce((a, s) => a + s.volume, 0),
    )
  }
  const basis = [
    ...missing,
    `washout to ${r.toPrecision(2)} of the old content: ${(volumeM3 / pathM3).toFixed(1)} volumes of the path (${(pathM3 * 1e6).toFixed(0)} mL)`,
    ...new Set(chains.flatMap((c) => c.why)),
  ]
  return { volumeM3, pathM3, atLeast: missing.length > 0, basis, missing }
}
