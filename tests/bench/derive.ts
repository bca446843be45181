import { layoutOf } from '../../server/core/derive/layout.ts'
import { createObserver } from '../../server/core/derive/observe.ts'
import { createStepper, type Step } from '../../server/core/derive/step.ts'
import { freshScan } from '../../server/core/scan/grid-state.ts'
import type { Measured } from './common.ts'
import { channels, course, skid, startMs } from './input.ts'

const scans = 60_000
const median = (xs: readonly number[]): number => [...xs].sort((a, b) => a - b)[xs.length >> 1]!

/**
 * ΔP, flow, temperature, viscosity and the model's ΔP of four segments from scans gathered to steps, against 128 μLQ/(π d⁴) of the same numbers in one
 * line at every scan; ns for one segment in one scan, turn by turn. Both sides' sums of what they computed are finite and above 0.
 */
export function derive(): Measured {
  const layout = layoutOf(skid())
  const si = new Float64Array(scans * channels)
  const row = course(scans, 'normal')
  const perUnit = [1e5, 1, 1e-6 / 60, 100]
  for (let k = 0; k < scans; k++) {
    row(k, si, k * channels)
    for (let c = 0; c < channels; c++) {
      const at = k * channels + c
      si[at] = c >= 8 && c < 16 ? si[at]! + 273.15 : si[at]! * perUnit[c < 8 ? 0 : c < 20 ? 2 : 3]!
    }
  }
  const scan = freshScan(channels)
  scan.used.fill(10)
  scan.rows = 10
  function ours(): number {
    const observer = createObserver(layout)
    let sum = 0
    const stepper = createStepper(layout, (step: Step) => {
      for (const s of observer.step(step, true)) sum += s.observation === null ? 0 : Math.abs(s.observation.y)
    })
    for (let k = 0; k < scans; k++) {
      scan.tMs = startMs + 1000 * k
      scan.si.set(si.subarray(k * channels, (k + 1) * channels))
      stepper.scan(scan)
    }
    return sum
  }
  function bare(): number {
    let sum = 0
    for (let k = 0; k < scans; k++)
      for (let s = 0; s < 4; s++)
        sum += si[k * channels + 20 + s]! / ((128 * 6e-4 * 5 * si[k * channels + 16 + s]!) / (Math.PI * 1e-12))
    return sum
  }
  const timed = (act: () => number): number => {
    const from = process.cpuUsage().user
    if (!(act() > 0)) throw new Error('nothing was derived')
    return ((process.cpuUsage().user - from) * 1000) / (scans * 4)
  }
  const oursNs: number[] = []
  const bareNs: number[] = []
  for (let turn = 0; turn < 7; turn++) {
    oursNs.push(timed(ours))
    bareNs.push(timed(bare))
  }
  return { cpuS: 0, rssMb: 0, figures: { oursNs: median(oursNs.slice(2)), bareNs: median(bareNs.slice(2)) } }
}
