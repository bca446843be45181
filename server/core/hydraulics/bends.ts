/** K1 and K∞ of a long-radius 90-degree bend (Hooper 1981, from memory); other bends and tables differ by 15 % and more. */
const K1 = 800
const K_INFINITY = 0.25
const INCH_M = 0.0254

/**
 * Loss coefficient of one 90-degree bend, K [-] in ΔP = K ρ v²/2: K1/Re + K∞ (1 + 1/D), D in inches. Re > 0, laminar to
 * turbulent. Below 3 mm the
 * last term is an extrapolation (made for pipes from half an inch): at 1 mm and Re 200 it gives 10.6 where Rennels and Hudson's
 * formula gives 2.8, so take it as an upper bound.
 * Source: W. B. Hooper, Chem. Eng. 88 (1981) no. 17, 96. Errors: none.
 */
export const bendLoss = (re: number, diameterM: number): number => K1 / re + K_INFINITY * (1 + INCH_M / diameterM)

/**
 * Loss coefficient of a sudden widening, in the narrow side's velocity head: (1 - (d1/d2)²)². Borda and Carnot; turbulent,
 * laminar up to 2.5 times it.
 */
export const expansionLoss = (narrowM: number, wideM: number): number => (1 - (narrowM / wideM) ** 2) ** 2
