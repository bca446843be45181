/** Wait before the nth try to connect again, ms: 0.5 s doubling to 3 s, spread by ±20 % so that many screens do not knock at once. */
export function backoffMs(attempt: number, random: number): number {
  const base = Math.min(3000, 500 * 2 ** Math.min(attempt, 3))
  return Math.round(base * (0.8 + 0.4 * random))
}
