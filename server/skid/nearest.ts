/** Letters and digits only, lower case: `dp_high_bar`, `DpHighBar` and `dp-high-bar` are one name. */
const bare = (name: string): string => name.toLowerCase().replace(/[^\p{L}\p{N}]/gu, '')

/**
 * Edits from a to b: insert, delete, replace a character, or swap two neighbours, each counts one (the restricted
 * Damerau-Levenshtein distance). Source: F. J. Damerau, Commun. ACM 7 (1964) 171.
 */
export function editDistance(a: string, b: string): number {
  let before: number[] = []
  let last = Array.from({ length: b.length + 1 }, (_, j) => j)
  for (let i = 1; i <= a.length; i++) {
    const row = [i]
    for (let j = 1; j <= b.length; j++) {
      const swap = i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1] ? before[j - 2]! + 1 : Infinity
      row.push(Math.min(last[j]! + 1, row[j - 1]! + 1, last[j - 1]! + (a[i - 1] === b[j - 1] ? 0 : 1), swap))
    }
    before = last
    last = row
  }
  return last[b.length]!
}

/**
 * The name that was probably meant, or null where none is near: same letters in another case or with other joints, then at most a
 * third of the letters changed, then a name that begins with what was written (`dpHigh` for `dpHighBar`).
 */
export function nearest(name: string, candidates: readonly string[]): string | null {
  const wanted = bare(name)
  if (wanted === '' || wanted.length > 60) return null
  let best: string | null = null
  let least = Math.max(1, Math.floor(wanted.length / 3)) + 1
  for (const candidate of candidates) {
    const distance = editDistance(wanted, bare(candidate))
    if (distance < least && distance < wanted.length) {
      best = candidate
      least = distance
    }
  }
  return best ?? (wanted.length >= 3 ? (candidates.find((c) => bare(c).startsWith(wanted)) ?? null) : null)
}

/** `did you mean 'x'?`, or null. */
export function meant(name: string, candidates: readonly string[]): string | null {
  const near = nearest(name, candidates)
  return near === null ? null : `did you mean '${near}'?`
}
