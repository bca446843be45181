import type { Operation, SegmentOperation } from '../figures/operation.ts'
import { rtdOf, smallSoluteDiffusivity } from '../rtd/choose.ts'
import type { PathStep } from '../rtd/path.ts'
import type { Skid } from '../skid.ts'

const carries = (all: readonly string[], part: readonly string[]): boolean => part.length > 0 && part.every((s) => all.includes(s))

/** Segments after this one through which all its streams go on, in flow order. */
const after = (skid: Skid, segment: number): number[] =>
  skid.segments.flatMap((g, i) => (i > segment && carries(g.streams, skid.segments[segment]?.streams ?? []) ? [i] : []))

/** The segment at whose end what passed this one leaves the skid; itself where nothing follows. */
export const outletOf = (skid: Skid, segment: number): number => after(skid, segment).at(-1) ?? segment

/** One segment as a vessel, its volume counted in flow of the outlet: V · Q_out/Q. Null where volume or flow is not known. */
function vessel(op: SegmentOperation, outM3S: number): PathStep | null {
  const { volumeM3, volumeFlowM3S: flow, channel, fluid, tempK, spec } = op
  if (volumeM3 === null || flow === null || flow <= 0 || fluid === null) return null
  const { rhoKgM3, viscPaS } = fluid.at(tempK)
  const velocityMS = channel === null ? 0 : flow / (channel.areaM2 * channel.parallel)
  const tube =
    channel === null
      ? null
      : {
          diameterM: channel.diameterM,
          lengthM: channel.lengthM,
          coilDiameterM: channel.coilDiameterM,
          velocityMS,
          re: (rhoKgM3 * velocityMS * channel.diameterM) / viscPaS,
        }
  const { rtd } = rtdOf({ kind: spec.kind, tube, diffusivityM2S: smallSoluteDiffusivity(tempK, viscPaS) })
  return { rtd, volume: (volumeM3 * outM3S) / flow }
}

/**
 * From a segment to the outlet at a working point: the vessel it is, and those that follow. Null where one of them has no known volume,
 * flow or liquid. Errors: FLUID_RANGE.
 */
export function outletPath(
  skid: Skid,
  operation: Operation,
  segment: number,
): { readonly through: PathStep; readonly path: readonly PathStep[] } | null {
  const outM3S = operation.segments[outletOf(skid, segment)]?.volumeFlowM3S ?? null
  if (outM3S === null || outM3S <= 0) return null
  const steps = [segment, ...after(skid, segment)].map((i) => {
    const op = operation.segments[i]
    return op === undefined ? null : vessel(op, outM3S)
  })
  const known = steps.filter((s) => s !== null)
  const [through, ...path] = known
  return through === undefined || known.length < steps.length ? null : { through, path }
}
