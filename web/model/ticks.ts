import type { ZoneClock } from './clock.ts'

export interface Tick {
  readonly at: number
  readonly label: string
}

const second = 1000
const minute = 60 * second
const hour = 60 * minute
const day = 24 * hour
const steps = [
  second,
  5 * second,
  15 * second,
  30 * second,
  minute,
  2 * minute,
  5 * minute,
  10 * minute,
  15 * minute,
  30 * minute,
  hour,
  2 * hour,
  3 * hour,
  6 * hour,
  12 * hour,
  day,
  2 * day,
  7 * day,
  14 * day,
]

/** Round times of the plant's zone inside [fromMs, toMs], at most `most` of them; midnight carries its date. */
export function timeTicks(fromMs: number, toMs: number, most: number, clock: ZoneClock): Tick[] {
  if (!(toMs > fromMs) || most < 1) return []
  const step = steps.find((s) => (toMs - fromMs) / s <= most) ?? 28 * day
  const ticks: Tick[] = []
  let at = Math.ceil((fromMs + clock.offsetMs(fromMs)) / step) * step - clock.offsetMs(fromMs)
  while (at <= toMs && ticks.length <= most + 1) {
    const midnight = (at + clock.offsetMs(at)) % day === 0
    ticks.push({ at, label: midnight ? clock.day(at) : step < minute ? clock.hms(at) : clock.hm(at) })
    at += step
    // Across a change of summer time the wall clock, not the interval, stays round.
    if (step >= hour) at = Math.round((at + clock.offsetMs(at)) / step) * step - clock.offsetMs(at)
  }
  return ticks
}

/** Round values inside [low, high] about `most` apart: 1, 2 or 5 times a power of ten. */
export function valueTicks(low: number, high: number, most: number): Tick[] {
  if (!(high > low) || most < 1) return []
  const raw = (high - low) / most
  const power = 10 ** Math.floor(Math.log10(raw))
  const step = ([1, 2, 5].find((m) => m * power >= raw) ?? 10) * power
  const digits = Math.max(0, -Math.floor(Math.log10(step) + 1e-9))
  const ticks: Tick[] = []
  for (let n = Math.ceil(low / step - 1e-9); n * step <= high + step * 1e-9; n++)
    ticks.push({ at: n * step, label: (Math.abs(n * step) < step / 2 ? 0 : n * step).toFixed(digits).replace('-', '−') })
  return ticks
}
