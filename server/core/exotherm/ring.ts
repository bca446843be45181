/**
 * The last `v.length` values, plain JSON. A hole (no value) has ok 0 and a meaningless v, so that v stays an array of doubles: a ring of
 * number | null would allocate at every push.
 */
export interface Ring {
  at: number
  readonly v: number[]
  readonly ok: number[]
}

export const ring = (length: number): Ring => ({
  at: 0,
  v: new Array<number>(length).fill(0),
  ok: new Array<number>(length).fill(0),
})

export function push(r: Ring, x: number | null): void {
  r.v[r.at] = x ?? 0
  r.ok[r.at] = x === null ? 0 : 1
  r.at = r.at + 1 === r.v.length ? 0 : r.at + 1
}

/** The value `n` pushes before the latest (0 is the latest); null where there is none or it is a hole. */
export function ago(r: Ring, n: number): number | null {
  const size = r.v.length
  if (n >= size) return null
  let i = r.at - 1 - n
  if (i < 0) i += size
  return r.ok[i] === 1 ? (r.v[i] as number) : null
}

/** Forgets everything: what follows a gap must not be compared with what was before it. */
export function forget(r: Ring): void {
  r.ok.fill(0)
}

/** Mean of the values among the latest `n`; null where there is none. Summed from the oldest, so replay gives the same bits. */
export function meanOf(r: Ring, n: number): number | null {
  let sum = 0
  let count = 0
  const size = r.v.length
  let i = r.at - n
  if (i < 0) i += size
  for (let k = 0; k < n; k++) {
    if (r.ok[i] === 1) {
      sum += r.v[i] as number
      count++
    }
    if (++i === size) i = 0
  }
  return count === 0 ? null : sum / count
}

export interface Line {
  /** Slope, unit of the values per second. */
  readonly slopePerS: number
  /** Its standard error from the residuals. */
  readonly seS: number
}

/**
 * Least-squares line through the values among the latest `n`, `stepS` apart: slope and its standard error
 * s / √Σ(t − t̄)², s² = Σe² / (m − 2). Source: any text on linear regression. Null with fewer than 4 values.
 */
export function lineOf(r: Ring, n: number, stepS: number): Line | null {
  let m = 0
  let st = 0
  let sx = 0
  let stt = 0
  let stx = 0
  let sxx = 0
  const base = ago(r, 0) ?? 0
  for (let k = 0; k < n; k++) {
    let i = r.at - 1 - k
    if (i < 0) i += r.v.length
    if (r.ok[i] !== 1) continue
    const t = -k
    const x = (r.v[i] as number) - base
    m++
    st += t
    sx += x
    stt += t * t
    stx += t * x
    sxx += x * x
  }
  if (m < 4) return null
  const dtt = stt - (st * st) / m
  const dtx = stx - (st * sx) / m
  const rest = Math.max(0, sxx - (sx * sx) / m - (dtx * dtx) / dtt)
  return { slopePerS: dtx / dtt / stepS, seS: Math.sqrt(rest / (m - 2) / dtt) / stepS }
}
