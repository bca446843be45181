import { type CusumChart, cusumRunLength } from './run-length.ts'

/** How far an estimated baseline may be off, in the chart's own σ: sd of its mean, mean and sd of the log of the true over the assumed σ. */
export interface BaselineDoubt {
  readonly meanSd: number
  readonly lnScale: number
  readonly lnScaleSd: number
}

/**
 * The doubt left by a baseline of so many steps [-]. Mean: 1/√n, for whitened steps too, as the wander that spoils the mean is the
 * wander the whitening divides by. σ: sd 1/√(2(n − 1)) of its logarithm, on average 1/(2(n − 1)) too small (log of χ²). A correlation
 * estimated from the same steps is off by sd √((1 − φ²)/n) and on average (1 + 3φ)/n too small (Marriott and Pope, Biometrika 41
 * (1954) 390); what stays unwhitened acts like a σ larger by √((1 + ρ)/(1 − ρ)), about e^ρ.  correlation  null when none was estimated.
 */
export function baselineDoubt(steps: number, correlation: number | null): BaselineDoubt {
  const scale = 1 / (2 * Math.max(1, steps - 1))
  if (correlation === null) return { meanSd: 1 / Math.sqrt(steps), lnScale: scale, lnScaleSd: Math.sqrt(scale) }
  const sd = Math.sqrt(scale + (1 - correlation * correlation) / steps)
  return { meanSd: 1 / Math.sqrt(steps), lnScale: scale + (1 + 3 * correlation) / steps, lnScaleSd: sd }
}

/** Gauss–Hermite nodes of a standard normal (five and three points, Abramowitz and Stegun table 25.10). */
const five = [
  { at: -2.856970013872806, weight: 0.011257411327720691 },
  { at: -1.355626179974266, weight: 0.22207592200561266 },
  { at: 0, weight: 0.5333333333333333 },
  { at: 1.355626179974266, weight: 0.22207592200561266 },
  { at: 2.856970013872806, weight: 0.011257411327720691 },
]
const three = [
  { at: -1.7320508075688772, weight: 1 / 6 },
  { at: 0, weight: 2 / 3 },
  { at: 1.7320508075688772, weight: 1 / 6 },
]

interface Case {
  readonly weight: number
  readonly chart: CusumChart
  readonly shift: number
}

/** The chart as it really runs, for each way the baseline may be off: seen in true σ, k, h and the mean are stretched. */
function cases(chart: CusumChart, doubt: BaselineDoubt | null): Case[] {
  if (doubt === null) return [{ weight: 1, chart, shift: 0 }]
  const list: Case[] = []
  for (const s of doubt.lnScaleSd > 0 ? three : [three[1]!]) {
    const scale = Math.exp(doubt.lnScale + doubt.lnScaleSd * s.at)
    const real = { ...chart, k: chart.k / scale, h: chart.h / scale, start: (chart.start ?? 0) / scale }
    const wS = doubt.lnScaleSd > 0 ? s.weight : 1
    for (const m of doubt.meanSd > 0 ? five : [five[2]!]) {
      list.push({ weight: wS * (doubt.meanSd > 0 ? m.weight : 1), chart: real, shift: (doubt.meanSd * m.at) / scale })
    }
  }
  return list
}

/** False alarms per sample in control, averaged over what the baseline may be [1/sample]: what a promise of "on average" counts. */
export function falseAlarmRate(chart: CusumChart, doubt: BaselineDoubt | null): number {
  let rate = 0
  for (const c of cases(chart, doubt)) rate += c.weight / cusumRunLength(c.chart, c.shift)
  return rate
}

/**
 * Mean and median run length in control over what the baseline may be [samples]. A few lucky baselines stretch the mean far beyond
 * what most charts will show, so the median is told beside it. Given the baseline, run lengths count as exponential: within 1 % of the
 * chain's own median for means above 100 (Brook and Evans, Biometrika 59 (1972) 539).
 */
export function inControlRunLength(chart: CusumChart, doubt: BaselineDoubt | null): { mean: number; median: number } {
  const parts = cases(chart, doubt).map((c) => ({ weight: c.weight, mean: cusumRunLength(c.chart, c.shift) }))
  const mean = parts.reduce((sum, part) => sum + part.weight * part.mean, 0)
  const surviving = (n: number) => parts.reduce((sum, part) => sum + part.weight * Math.exp(-n / part.mean), 0)
  let low = 0
  let high = 1
  while (surviving(high) > 0.5 && high < 1e15) high *= 2
  for (let i = 0; i < 60; i++) {
    const mid = (low + high) / 2
    if (surviving(mid) > 0.5) low = mid
    else high = mid
  }
  return { mean, median: high }
}
