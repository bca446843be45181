/*
 * The grid of numbers k / 10^d with integers k, on which instruments and loggers write. IEEE 754 rounds the quotient correctly, so k and d
 * stand for one double, and for these very bits where the quotient equals it (−0 apart, which no k gives).
 */
const mostPlaces = 9
/** |k| stays below this, so that differences (2^52) and their zigzag form (2^53) are exact doubles; holds microseconds since 1970 until 2041. */
const mostK = 2 ** 51
/** 10^d. */
export const powers = Array.from({ length: mostPlaces + 1 }, (_, d) => 10 ** d)

/** Fewest decimal places at which v is on the grid, from `least` on; −1 when there is none (NaN, −0, infinities, finer fractions). */
function placesOf(v: number, least: number): number {
  if (v === 0) return Object.is(v, -0) ? -1 : least
  for (let d = least; d <= mostPlaces; d++) {
    const p = powers[d]!
    const k = Math.round(v * p)
    if (k / p === v && k < mostK && k > -mostK) return d
  }
  return -1
}

/**
 * Fills `grid` with v·10^d, `off` with 1 for each block of `blockSize` that has a value off the grid. Returns d and whether all values are on it.
 * d grows to what the finest value on any grid asks for; a value off every grid does not move it.
 */
export function toGrid(
  values: Float64Array,
  n: number,
  grid: Float64Array,
  off: Uint8Array,
  blockSize: number,
): { places: number; whole: boolean } {
  let places = 0
  for (;;) {
    const p = powers[places]!
    let finer = places
    let whole = true
    off.fill(0)
    for (let start = 0, b = 0; start < n && finer === places; start += blockSize, b++) {
      const end = Math.min(n, start + blockSize)
      for (let i = start; i < end; i++) {
        const v = values[i]!
        const k = Math.round(v * p)
        if (k / p === v && k < mostK && k > -mostK && (k !== 0 || !Object.is(v, -0))) {
          grid[i] = k
          continue
        }
        const d = placesOf(v, places)
        if (d > places) finer = d
        else {
          off[b] = 1
          whole = false
        }
        break
      }
    }
    if (finer === places) return { places, whole }
    places = finer
  }
}
