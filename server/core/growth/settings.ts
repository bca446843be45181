/**
 * Defaults of onset and forecast. Starting values under change control, not constants of nature: the doubt about the growth law and
 * the raggedness of growth were set on simulated deposits; a site may replace them by what its own deposits show.
 */
export interface GrowthSettings {
  /** probability that the onset interval holds the onset */
  readonly onsetLevel: number
  /** the onset likelihood is raised to this power: real growth is more ragged than any model, and the interval must still hold */
  readonly onsetPower: number
  /** ln ratio at which a typical limit lies; scales raggedness and curvature while the limit is not told [-] */
  readonly typicalLnLimit: number
  /** points the onset fit works on at most */
  readonly onsetPoints: number
  /** probability that the forecast interval holds the time of the limit */
  readonly forecastLevel: number
  /** the likelihood of each explanation of the growth is raised to this power before they are weighed: none of them is quite true */
  readonly forecastPower: number
  /** means over the growth the forecast works on */
  readonly forecastMeans: number
  /** growth shape (e^(Ks) − 1)/(e^K − 1) of the thickness: K below 0 slows, above 0 speeds up; weights sum to 1 */
  readonly laws: readonly { readonly k: number; readonly weight: number }[]
  /** length fraction the deposit sits on: 1 is all along; weights sum to 1 */
  readonly fractions: readonly { readonly fraction: number; readonly weight: number }[]
  /** raggedness of growth in the onset fit: coefficient of variation of the growth clock when it reaches the limit [-] */
  readonly clockCv: number
  /** the same in the forecast, where the data may tell steady growth from ragged; weights sum to 1 */
  readonly clocks: readonly { readonly cv: number; readonly weight: number }[]
  /** nodes of the grid over the time from onset to limit, and how many sd of its logarithm it reaches either way */
  readonly gridNodes: number
  readonly gridReach: number
  /** no forecast before the rise of ln ratio is so large a part of the way to the limit */
  readonly leastPart: number
  /** no forecast when the median lies further ahead than so many times the growth seen */
  readonly farthest: number
  /** a lone point counts as a spike beyond so many sd */
  readonly spikeSigmas: number
  /** a fall counts as slough-off beyond so many sd, and never below this ln ratio */
  readonly sloughSigmas: number
  readonly sloughLeast: number
}

const law = (k: number) => ({ k, weight: 0.5 / 7 })

export const growthDefaults: GrowthSettings = {
  onsetLevel: 0.9,
  onsetPower: 0.7,
  typicalLnLimit: 0.8,
  onsetPoints: 200,
  forecastLevel: 0.8,
  forecastPower: 0.85,
  forecastMeans: 16,
  laws: [law(-2.4), law(-1.6), law(-0.8), { k: 0, weight: 0.5 }, law(0.8), law(1.6), law(2.4), law(3.2)],
  fractions: [
    { fraction: 1, weight: 0.64 },
    { fraction: 0.3, weight: 0.12 },
    { fraction: 0.2, weight: 0.12 },
    { fraction: 0.12, weight: 0.12 },
  ],
  clockCv: 0.06,
  clocks: [
    { cv: 0.06, weight: 0.6 },
    { cv: 0.11, weight: 0.4 },
  ],
  gridNodes: 13,
  gridReach: 3.5,
  leastPart: 0.02,
  farthest: 20,
  spikeSigmas: 6,
  sloughSigmas: 5,
  sloughLeast: 0.02,
}
