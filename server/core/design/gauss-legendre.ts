export interface Nodes {
  readonly at: Float64Array
  readonly weight: Float64Array
}

const kept = new Map<number, Nodes>()

/** Gauss–Legendre nodes and weights on [0, 1], n ≥ 1, by Newton's method on the Legendre recurrence (common practice). */
export function gaussLegendre(n: number): Nodes {
  const known = kept.get(n)
  if (known !== undefined) return known
  const at = new Float64Array(n)
  const weight = new Float64Array(n)
  for (let i = 0; i < n; i++) {
    let x = Math.cos((Math.PI * (n - i - 0.25)) / (n + 0.5))
    let slope = 1
    for (let turn = 0; turn < 60; turn++) {
      let p = 1
      let before = 0
      for (let k = 1; k <= n; k++) {
        const next = ((2 * k - 1) * x * p - (k - 1) * before) / k
        before = p
        p = next
      }
      slope = (n * (x * p - before)) / (x * x - 1)
      const move = p / slope
      x -= move
      if (Math.abs(move) < 1e-15) break
    }
    at[i] = (x + 1) / 2
    weight[i] = 1 / ((1 - x * x) * slope * slope)
  }
  const nodes = { at, weight }
  kept.set(n, nodes)
  return nodes
}
