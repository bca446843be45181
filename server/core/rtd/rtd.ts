import { MonitorError } from '../errors.ts'
import { residualClosed, residualOpen } from './dispersion.ts'
import { lnGammaQ } from './special.ts'

/** How a vessel spreads what enters it, in θ = volume passed over vessel volume. */
export type Rtd =
  | { readonly kind: 'tanks'; readonly n: number }
  | { readonly kind: 'dispersion'; readonly pe: number; readonly ends: 'open' | 'flux' | 'closed' }
  | { readonly kind: 'laminar'; readonly beta?: number }
  | { readonly kind: 'coil'; readonly beta?: number }
  | { readonly kind: 'plugThenTanks'; readonly plugShare: number; readonly n: number }

/** Fastest fraction and tail exponent of laminar flow in a coil; the fraction makes the mean exactly 1 for the exponent. */
const coilExponent = 2.81
const coilFirst = 1 - 1 / coilExponent

/** In words, for a plan or a report. */
export function describeRtd(rtd: Rtd): string {
  switch (rtd.kind) {
    case 'tanks':
      return rtd.n === 1 ? 'one stirred tank' : `${Number(rtd.n.toPrecision(3))} tanks in series`
    case 'dispersion':
      return `axial dispersion, Pe ${rtd.pe.toPrecision(3)}, ${rtd.ends} ends`
    case 'laminar':
      return `laminar flow in a straight tube${rtd.beta === undefined ? ', segregated' : `, diffusion across counted (Dτ/a² ${rtd.beta.toPrecision(2)})`}`
    case 'coil':
      return `laminar flow in a coil${rtd.beta === undefined ? ', segregated' : `, diffusion across counted (Dτ/a² ${rtd.beta.toPrecision(2)})`}`
    case 'plugThenTanks':
      return `plug flow over ${(100 * rtd.plugShare).toFixed(0)} % of the volume, then ${rtd.n === 1 ? 'one stirred tank' : `${rtd.n} tanks`}`
  }
}

function check(rtd: Rtd): void {
  const ok =
    rtd.kind === 'tanks'
      ? rtd.n > 0 && rtd.n <= 1e5
      : rtd.kind === 'dispersion'
        ? rtd.pe > 0 && rtd.pe <= 1e6
        : rtd.kind === 'plugThenTanks'
          ? rtd.n > 0 && rtd.plugShare >= 0 && rtd.plugShare < 1
          : (rtd.beta ?? 0) >= 0 && (rtd.beta ?? 0) <= 0.8
  if (!ok) throw new MonitorError('RTD_RANGE', `residence-time model out of range: ${describeRtd(rtd)}`)
}

/**
 * Upper envelope of the laminar tube's residual over that of segregated flow when diffusion works across it, β = Dτ/a² up to 0.8 (Taylor-Aris holds
 * beyond), y = β^(1/3) θ:  min(1 + 1.6 y, 2.1, 5 e^(−2β(θ−0.45)³)).
 * The layer that lags at the wall, a/(4θ) thick, empties by diffusion: ln R falls as −2.5 β θ³ (small-ball law of the area under a reflected Brownian
 * path, K = 2·1.0188³/27). Constants set above random walks of 1e5 particles at β 0.001 to 0.7, by up to a factor 10 in R.
 */
function acrossDiffusion(beta: number, theta: number): number {
  return Math.min(1 + 1.6 * Math.cbrt(beta) * theta, 2.1, wallLayer(beta, theta))
}
const wallLayer = (beta: number, theta: number): number => 5 * Math.exp(-2 * beta * Math.max(0, theta - 0.45) ** 3)

/**
 * Share of what was inside at the start (or of a step's old value) still to leave after θ volumes, 1 − F(θ) [-].
 *   tanks in series Q(N, Nθ);  dispersion: dispersion.ts;  laminar tube 1/(4θ²) from θ = 1/2;  plug of share p then N tanks Q(N, N(θ−p)/(1−p));
 *   laminar coil (0.644/θ)^2.81 from θ = 0.644. With `beta` (β = Dτ/a²) diffusion across the tube is counted, as an upper envelope.
 * Segregated laminar flow leaves out diffusion and is therefore the slow side; a coil's cross flow only mixes more (M. Johnson, R. D. Kamm, J. Fluid
 * Mech. 172 (1986) 329), so its tail is held to that of a straight tube where diffusion is counted. N > 0 need not be whole.
 * Source: O. Levenspiel, Chemical Reaction Engineering, ch. 13-15; coil: exponent of D. M. Ruthven, Chem. Eng. Sci. 26 (1971) 1113, from
 * memory, with the first appearance set so that the mean is 1 (he gives 0.613).
 * Errors: RTD_RANGE for a model out of range or θ < 0.
 */
export function residual(rtd: Rtd, theta: number): number {
  check(rtd)
  if (!(theta >= 0)) throw new MonitorError('RTD_RANGE', `volumes passed must be ≥ 0, got ${theta}`)
  switch (rtd.kind) {
    case 'tanks':
      return Math.exp(lnGammaQ(rtd.n, rtd.n * theta))
    case 'dispersion':
      return rtd.ends === 'closed' ? residualClosed(rtd.pe, theta) : residualOpen(rtd.pe, theta, rtd.ends)
    case 'laminar':
      return theta <= 0.5 ? 1 : Math.min(1, (rtd.beta === undefined ? 1 : acrossDiffusion(rtd.beta, theta)) / (4 * theta * theta))
    case 'coil':
      return theta <= coilFirst
        ? 1
        : Math.min(
            (coilFirst / theta) ** coilExponent,
            rtd.beta === undefined ? 1 : wallLayer(rtd.beta, theta) / (4 * theta * theta),
          )
    case 'plugThenTanks': {
      const rest = (theta - rtd.plugShare) / (1 - rtd.plugShare)
      return rest <= 0 ? 1 : Math.exp(lnGammaQ(rtd.n, rtd.n * rest))
    }
  }
}

/**
 * Volumes θ until the residual falls to r, 0 < r < 1, by bisection on 1 − F. Below r = 1e-5 the answer hangs on the boundary conditions and on
 * the model's tail more than on the vessel (open and closed ends differ by up to a factor 2.5 at Pe 2): show the model beside it.
 * Errors: RTD_RANGE for r outside (0, 1), and below 1e-8 for closed ends, where the inversion's own error begins to show.
 */
export function washoutVolumes(rtd: Rtd, r: number): number {
  if (!(r > 0 && r < 1)) throw new MonitorError('RTD_RANGE', `residual fraction must lie between 0 and 1, got ${r}`)
  if (rtd.kind === 'dispersion' && rtd.ends === 'closed' && r < 1e-8)
    throw new MonitorError('RTD_RANGE', `residual ${r} is below what closed-end dispersion resolves (1e-8)`)
  if (rtd.kind === 'laminar' && rtd.beta === undefined) return 0.5 / Math.sqrt(r)
  if (rtd.kind === 'coil' && rtd.beta === undefined) return coilFirst * r ** (-1 / coilExponent)
  let low = 0
  let high = 1
  while (residual(rtd, high) > r) {
    low = high
    high *= 2
  }
  while (high - low > 1e-10 * high) {
    const middle = (low + high) / 2
    if (residual(rtd, middle) > r) low = middle
    else high = middle
  }
  return (low + high) / 2
}
