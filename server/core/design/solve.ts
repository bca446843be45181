/**
 * Solves A x = b for a square A (rows one after another, destroyed) by Gaussian elimination with row exchange; b is overwritten and
 * returned. Meant for the well-scaled systems of run lengths, of a hundred unknowns or so.
 */
export function solve(a: Float64Array, b: Float64Array): Float64Array {
  const n = b.length
  for (let c = 0; c < n; c++) {
    let best = c
    for (let r = c + 1; r < n; r++) if (Math.abs(a[r * n + c]!) > Math.abs(a[best * n + c]!)) best = r
    if (best !== c) {
      for (let k = c; k < n; k++) {
        const held = a[c * n + k]!
        a[c * n + k] = a[best * n + k]!
        a[best * n + k] = held
      }
      const held = b[c]!
      b[c] = b[best]!
      b[best] = held
    }
    const pivot = a[c * n + c]!
    for (let r = c + 1; r < n; r++) {
      const factor = a[r * n + c]! / pivot
      if (factor === 0) continue
      for (let k = c + 1; k < n; k++) a[r * n + k]! -= factor * a[c * n + k]!
      b[r]! -= factor * b[c]!
    }
  }
  for (let r = n - 1; r >= 0; r--) {
    let sum = b[r]!
    for (let k = r + 1; k < n; k++) sum -= a[r * n + k]! * b[k]!
    b[r] = sum / a[r * n + r]!
  }
  return b
}
