import { MonitorError } from '../errors.ts'
import type { FlushPlan } from '../report.ts'
import { toSi, valueUnit } from '../units.ts'
import { type FlushInput, type FlushSettings, flushDefaults } from './input.ts'
import { activeStreams, carriedBy, inventoryOf } from './inventory.ts'
import { type FlushPath, flushPath } from './legs.ts'
import { flushLiquids } from './liquids.ts'
import { addKnown, type Stage } from './stage.ts'
import { displace, prepare, warm } from './steps-displace.ts'
import { recool, restart } from './steps-recover.ts'
import { dry, water } from './steps-water.ts'

const standing =
  'Advisory only: follow approved site procedures, local codes and licensed, competent persons; a recommendation may be wrong.'

function checked(settings: FlushSettings): FlushSettings {
  const shares = [
    settings.residualFraction,
    settings.washFraction,
    settings.restartFraction,
    settings.dpShare,
    settings.waterStartShare,
  ]
  const positive = [settings.warmUpKPerMin, settings.dissolveMargin]
  const minutes = [settings.soakMinutes, settings.confirmMinutes, settings.karlFischerMinutes, settings.warmHoldMinutes]
  if (
    !(
      shares.every((s) => s > 0 && s < 1) &&
      positive.every((p) => p > 0) &&
      minutes.every((m) => m >= 0) &&
      settings.warmC >= 5 &&
      settings.warmC <= 60
    )
  ) {
    throw new MonitorError(
      'FLUSH_REFUSED',
      'flush settings out of range: shares between 0 and 1, rates above 0, times not negative, warm-up to 5 … 60 °C',
    )
  }
  return settings
}

/** Why the flush is not advised at all: the deposit leaves hardly any flow within the pressure share. `clear` is the flow a clean path would have. */
function blocked(path: FlushPath, flowM3S: number | null, clear: number | null): string | null {
  const normal = path.normalM3S
  if (flowM3S === null || normal === null || clear === null || flowM3S >= clear) return null
  if (flowM3S < 0.1 * clear)
    return `only ${(flowM3S * 6e7).toFixed(1)} mL/min would stay within the pressure share, under a tenth of what a clean path takes`
  for (const leg of path.legs) {
    const { flowLow } = leg.op.spec.limits
    const first = leg.op.streams[0]
    const tag = path.operation.flowTags.find((t) => t.tag === first?.spec.flowTag)
    if (flowLow === null || first === undefined || tag === undefined || first.volumeFlowM3S === null) continue
    const low = toSi(flowLow, valueUnit(tag))
    const rho = first.fluid?.at(first.tempK).rhoKgM3 ?? null
    const lowM3S = tag.quantity === 'massFlow' ? (rho === null ? null : low / rho) : low
    const share = first.volumeFlowM3S / normal
    if (lowM3S !== null && flowM3S * share < lowM3S && clear * share >= lowM3S) {
      return `the flow of ${first.id} within the pressure share, ${(flowM3S * share * 6e7).toFixed(1)} mL/min, is below the low-flow limit of ${leg.id}, and would not be with a clean path`
    }
  }
  return null
}

/**
 * The flush plan F0 to F6 (common practice) of one or more segments: flow, volume, time, hold points, end criteria and hazards of each step, computed
 * from the skid file, the present ratios, flows and temperatures. Recommendations under the site's own procedure. What the file does not
 * carry is null in the step and named under `missing`; what was assumed stands under `assumptions`. Pure and deterministic.
 * Errors: FLUSH_REFUSED for a segment the skid has not, a solvent that is not fit, settings out of range; FLUID_* from the liquids.
 */
export function planFlush(input: FlushInput): FlushPlan {
  const settings = checked({ ...flushDefaults, ...input.settings })
  const path = flushPath(input)
  const liquids = flushLiquids(path, settings)
  const { ids: active, assumption } = activeStreams(path)
  const reagents = carriedBy(path, active)
  const inventory = path.legs.map((l) => inventoryOf(l.op, reagents.carried, active))
  const activeMol = addKnown(...inventory.flatMap((i) => i.reagents.filter((x) => active.includes(x.stream)).map((x) => x.mol)))
  const stage: Stage = { path, liquids, settings, active, activeMol }
  const f1 = displace(stage)
  const f3 = water(stage)
  const f4 = dry(stage)
  const built = [prepare(stage), f1, warm(stage), f3, f4, recool(stage), restart(stage)]
  const steps = built.map((b) => b.step)
  const stuck = blocked(path, f1.flowM3S, f1.clearM3S)
  const wet = blocked(path, f3.flowM3S, f3.clearM3S)
  const refused = [
    ...(stuck === null
      ? []
      : [
          {
            step: 'F1',
            reason: `${stuck}: blockage. Advised instead: stop feeds, make safe, isolate, escalate; pressure is never raised to clear it.`,
          },
        ]),
    ...(stuck === null && wet !== null ? [{ step: 'F3', reason: `${wet}: escalate before water.` }] : []),
  ]
  const leftOut = path.legs.some((l) => !l.asked && l.op.volumeM3 === null)
  const cautions = [
    standing,
    "To be approved by the site's authorised person. Another ratio, temperature, flow or tracer test than counted here changes the plan.",
    ...(leftOut ? ['Volumes are lower bounds: a segment on the path has no known volume (see what is not computed).'] : []),
    'Assume the line holds active organolithium until the effluent test says otherwise.',
    'Do not admit water before displacement and warm-up are both confirmed.',
    'Do not raise pressure to clear a blockage.',
    'Washout volumes hang on the residence-time model named in each step; a tracer test replaces it. Dead legs are not in them.',
    ...inventory
      .filter((i) => (i.hydrolysisKJ ?? 0) > 0)
      .map(
        (i) =>
          `${i.segment} holds up to ${(i.hydrolysisKJ ?? 0).toFixed(1)} kJ if its organolithium met water${i.hydrolysisRiseK === null ? '' : `, ${i.hydrolysisRiseK.toFixed(0)} K adiabatic`}.`,
      ),
  ]
  const assumptions = [
    ...path.operation.assumptions,
    ...path.assumptions,
    ...liquids.assumptions,
    ...(assumption === null ? [] : [assumption]),
    ...reagents.assumptions,
    'inventory counted as if nothing had reacted',
    'deposit counted as a uniform film of LiOH crystal',
  ]
  return {
    steps,
    segments: [...input.segments],
    path: path.legs.map((l) => l.id),
    totalMinutes: addKnown(...steps.map((s) => s.minutes)),
    inventory,
    waterReference: f3.reference,
    refused,
    cautions,
    assumptions,
    missing: [
      ...new Set([
        ...built.flatMap((b) => b.missing),
        ...inventory
          .filter((i) => i.volumeMl === null)
          .map((i) => `${i.segment}: inventory, needs volumeMl or a channel with bore and length`),
      ]),
    ],
  }
}
