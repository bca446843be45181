import { type Layout, layoutOf } from '../../../server/core/derive/layout.ts'
import type { Step } from '../../../server/core/derive/step.ts'
import { fluidOf } from '../../../server/core/fluids/fluid.ts'
import { propertyTable } from '../../../server/core/fluids/property-table.ts'
import { randomOf } from '../../../server/core/sim/random.ts'
import type { Skid } from '../../../server/core/skid.ts'
import { twoSegments } from '../../helpers/skids.ts'

const shared = twoSegments()
/** Bores so long that the file's own hydraulics give 2.0 and 1.5 bar at the working point, within 20 %. */
export const duoSkid: Skid = {
  ...shared,
  segments: shared.segments.map((g, i) => ({ ...g, channel: { ...g.channel!, lengthM: [10.3, 7.7][i]! } })),
}
export const duo: Layout = layoutOf(duoSkid)
export const stepMs = 30_000
export const startMs = Date.UTC(2031, 0, 6)

export const thf = propertyTable(fluidOf({ kind: 'solvent', solvent: 'tetrahydrofuran' }))
/** Working point that ΔP is 2.0 and 1.5 bar at: laminar, Re about 1100. */
const at = { kgH: 6, tempK: 213.15, dpPa: [2e5, 1.5e5] }

/** A step test: so many steps at each flow, kg/h (0: pumps at rest), and what is wrong with the readings. */
export interface StepTest {
  readonly plan: readonly (readonly [steps: number, kgH: number])[]
  /** True exponent of flow of the first segment; the second has 1.2. */
  readonly n?: number
  /** What PT-1 shows too much, Pa; white noise of a step's mean at each tap, Pa; of the flow reading, relative. */
  readonly zeroPa?: number
  readonly noisePa?: number
  readonly flowNoise?: number
  /** Rise of the first segment's resistance an hour, ln. */
  readonly driftPerHour?: number
  /** Temperature at step k, °C. */
  readonly tempC?: (k: number) => number
  readonly headPa?: number
  readonly seed?: number
}

/** Steps of the two-segment skid: ΔP ∝ Q^n μ^(2−n) ρ^(n−1), as a segment of one power of flow has it. */
export function stepsOf(test: StepTest, layout: Layout = duo): Step[] {
  const { n = 1.3, zeroPa = 0, noisePa = 100, flowNoise = 0.0005, driftPerHour = 0, tempC = () => -60, headPa = 0, seed = 1 } = test
  const r = randomOf(seed, 'step test')
  const steps: Step[] = []
  for (const [count, kgH] of test.plan)
    for (let j = 0; j < count; j++) {
      const k = steps.length
      const tempK = tempC(k) + 273.15
      const dp = [n, 1.2].map((power, i) => {
        if (kgH === 0) return i === 0 ? headPa : 0
        const rho = thf.rhoKgM3(tempK) / thf.rhoKgM3(at.tempK)
        const flow = kgH / at.kgH / rho
        const visc = thf.viscPaS(tempK) / thf.viscPaS(at.tempK)
        const grown = i === 0 ? Math.exp((driftPerHour * k) / 120) : 1
        return at.dpPa[i]! * grown * flow ** power * visc ** (2 - power) * rho ** (power - 1) + (i === 0 ? headPa : 0)
      })
      const tapPa = [3e5 + dp[0]! + dp[1]! + zeroPa, 3e5 + dp[1]!, 3e5].map((p) => p + noisePa * r.normal())
      steps.push({
        tMs: startMs + (k + 0.5) * stepMs,
        stepMs,
        seen: 1,
        gapSteps: 0,
        dpPa: [tapPa[0]! - tapPa[1]!, tapPa[1]! - tapPa[2]!],
        dpVarPa2: [2 * noisePa ** 2, 2 * noisePa ** 2],
        tapPa,
        flow: [(kgH / 3600) * (1 + flowNoise * r.normal())],
        tempK: layout.skid.tags.map((t) => (t.quantity === 'temperature' ? tempK + 0.02 * r.normal() : null)),
        production: null,
        flush: null,
      })
    }
  return steps
}
