/** Re = 4 ṁ/(π D μ) of a round bore: massFlowKgS through one bore, diameterM, viscPaS. No range; 0 at no flow. */
export const reynolds = (massFlowKgS: number, diameterM: number, viscPaS: number): number =>
  (4 * Math.abs(massFlowKgS)) / (Math.PI * diameterM * viscPaS)

/**
 * Darcy friction factor (4 × Fanning) of a straight round tube over all regimes, smooth in Re:
 *   f = 8 [ (8/Re)^12 + (A+B)^-3/2 ]^(1/12),  A = [2.457 ln 1/((7/Re)^0.9 + 0.27 ε/D)]^16,  B = (37530/Re)^16
 * Re > 0 [-], relRoughness ε/D [-] from 0 to 0.05. Laminar it is 64/Re (to 1e-14 below Re 900), turbulent within 2.2 % of
 * Colebrook from Re 10000 and 3.1 % from 4000; between Re 2100 and 4000 it is a smooth guess as any formula is. Source: S. W.
 * Churchill, Chem. Eng. 84 (1977) no. 24, 91.
 * Errors: none; Re = 0 gives Infinity (there is no friction factor at rest).
 */
export function darcyFriction(re: number, relRoughness: number): number {
  if (re < LAMINAR_TO_ROUNDING) return 64 / re
  const a = sixteenth(-2.457 * Math.log((7 / re) ** 0.9 + 0.27 * relRoughness))
  const turbulent = a + sixteenth(37530 / re)
  const c = 8 / re
  const c3 = c * c * c
  const c6 = c3 * c3
  return 8 * (c6 * c6 + 1 / (turbulent * Math.sqrt(turbulent))) ** (1 / 12)
}

/** Below this Re the turbulent term of Churchill's formula is under 5e-16 of the laminar one for every roughness up to 0.05. */
export const LAMINAR_TO_ROUNDING = 900

/** x^16 by squaring: several times as fast as a general power, and this is the scan loop. */
function sixteenth(x: number): number {
  const x2 = x * x
  const x4 = x2 * x2
  const x8 = x4 * x4
  return x8 * x8
}

/**
 * Colebrook and White's friction factor (Darcy) solved to machine precision: 1/√f = -2 log10(ε/(3.7 D) + 2.51/(Re √f)), by
 * Newton on x = 1/√f from Haaland's start (three or four steps). Re from 4000 (turbulent only), ε/D from 0 to 0.05.
 * Source: C. F. Colebrook, J. Inst. Civ. Eng. 11 (1939) 133; start: S. E. Haaland, J. Fluids Eng. 105 (1983) 89. Errors: none.
 */
export function colebrook(re: number, relRoughness: number): number {
  const a = relRoughness / 3.7
  const b = 2.51 / re
  const perLn = 2 / Math.LN10
  let x = -1.8 * Math.log10(a ** 1.11 + 6.9 / re)
  for (let i = 0; i < 20; i++) {
    const inner = a + b * x
    const step = (x + perLn * Math.log(inner)) / (1 + (perLn * b) / inner)
    x -= step
    if (Math.abs(step) <= 4e-16 * Math.abs(x)) break
  }
  return 1 / (x * x)
}
