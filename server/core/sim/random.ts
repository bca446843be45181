/** A stream of random numbers. The same seed and name give the same numbers; streams of other names are unrelated. */
export interface Random {
  /** Uniform in [0, 1), 32 bits. */
  next(): number
  /** Uniform in [low, high). */
  between(low: number, high: number): number
  /** Standard normal. */
  normal(): number
  /** Exponential with the given mean. */
  exponential(mean: number): number
  /** One of a non-empty list. */
  pick<T>(items: readonly T[]): T
  /** True with probability p. */
  chance(p: number): boolean
}

/** FNV-1a, 32 bits, of the UTF-16 code units. Source: G. Fowler, L. Noll, K.-P. Vo, IETF draft-eastlake-fnv. */
function fnv1a(text: string): number {
  let h = 0x811c9dc5
  for (let i = 0; i < text.length; i++) h = Math.imul(h ^ text.charCodeAt(i), 0x01000193)
  return h >>> 0
}

const rotl = (x: number, k: number) => ((x << k) | (x >>> (32 - k))) >>> 0

/**
 * xoshiro128** with its state filled by a 32-bit mixer of the splitmix family from seed and name.
 * Not for secrets. Period 2^128 − 1. Normal deviates by the polar method.
 * Source: D. Blackman, S. Vigna, ACM Trans. Math. Softw. 47 (2021) 36; G. Marsaglia, T. A. Bray, SIAM Rev. 6 (1964) 260–264.
 * seed  any integer; its low 53 bits count.
 */
export function randomOf(seed: number, name: string): Random {
  let mix = (fnv1a(name) ^ (seed >>> 0) ^ Math.imul(Math.floor(seed / 4294967296) >>> 0, 0x9e3779b9)) >>> 0
  const fill = () => {
    mix = (mix + 0x9e3779b9) >>> 0
    let z = mix
    z = Math.imul(z ^ (z >>> 16), 0x21f0aaad)
    z = Math.imul(z ^ (z >>> 15), 0x735a2d97)
    return (z ^ (z >>> 15)) >>> 0
  }
  let a = fill()
  let b = fill()
  let c = fill()
  let d = fill() | 1
  const next = () => {
    const result = Math.imul(rotl(Math.imul(b, 5), 7), 9) >>> 0
    const t = b << 9
    c ^= a
    d ^= b
    b ^= c
    a ^= d
    c ^= t
    d = rotl(d, 11)
    return result / 4294967296
  }
  let spare: number | null = null
  const normal = () => {
    if (spare !== null) {
      const value = spare
      spare = null
      return value
    }
    for (;;) {
      const u = 2 * next() - 1
      const v = 2 * next() - 1
      const s = u * u + v * v
      if (s > 0 && s < 1) {
        const f = Math.sqrt((-2 * Math.log(s)) / s)
        spare = v * f
        return u * f
      }
    }
  }
  return {
    next,
    between: (low, high) => low + (high - low) * next(),
    normal,
    exponential: (mean) => -mean * Math.log(1 - next()),
    pick: (items) => items[Math.floor(next() * items.length)]!,
    chance: (p) => next() < p,
  }
}
