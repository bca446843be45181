/** Failed sign-ins of a name or from an address. */
export interface Failures {
  readonly count: number
  readonly lastMs: number
}

/** So many failures are free, then the wait doubles with each from `firstMs` to `mostMs`. */
export interface WaitRule {
  readonly free: number
  readonly firstMs: number
  readonly mostMs: number
}

/** A name waits 5 min at most, so that nobody can be kept out for long by others; guesses on one name stay below 300 a day. */
export const nameRule: WaitRule = { free: 4, firstMs: 2000, mostMs: 300_000 }
/** Many people may share an address. */
export const addressRule: WaitRule = { free: 20, firstMs: 2000, mostMs: 900_000 }
/** Failures are forgotten after a day without another. */
export const forgottenMs = 86_400_000

const isForgotten = (f: Failures, nowMs: number): boolean => nowMs - f.lastMs >= forgottenMs || nowMs < f.lastMs

/** With one failure more. */
export const failedAgain = (f: Failures | null, nowMs: number): Failures => ({
  count: f === null || isForgotten(f, nowMs) ? 1 : f.count + 1,
  lastMs: nowMs,
})

/** How long the next try must still wait [ms]; 0 when it may come. */
export function waitMs(f: Failures | null, rule: WaitRule, nowMs: number): number {
  if (f === null || isForgotten(f, nowMs) || f.count <= rule.free) return 0
  const wait = Math.min(rule.mostMs, rule.firstMs * 2 ** Math.min(40, f.count - rule.free - 1))
  return Math.max(0, f.lastMs + wait - nowMs)
}
