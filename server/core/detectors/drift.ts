import { MonitorError } from '../errors.ts'
import { brokenStick } from '../stats/broken-stick.ts'
import { memoryInflation, theilSen } from '../stats/robust.ts'
import { type Detector, quiet, type Verdict } from './detector.ts'

export interface DriftConfig {
  /** how far back it looks [h] */
  readonly windowHours: number
  /** the least rise worth telling [σ/h], 0 or more */
  readonly leastPerHour: number
  /** of the slope's interval, 0.5 to below 1; 0.99 suits a verdict looked at all night */
  readonly level: number
}

/** Mean of `count` samples: middle of their times, mean of their values. */
interface Mean {
  readonly tMs: number
  readonly z: number
  readonly count: number
}

export interface DriftState {
  readonly means: readonly Mean[]
  /** the mean being gathered, and how many samples make one by now */
  readonly open: Mean | null
  readonly per: number
  readonly verdict: Verdict
}

/** Means kept at most; past it neighbours are joined. 60 give 1770 slopes, sorted once a mean. */
const MOST = 60
const LEAST = 12

/**
 * Robust slope over a window that follows what has been seen: every sample at first, then means of 2, 4, 8 … of them, never more than
 * 60 and never older than the window. `rising` when the low end of the slope's interval lies above `leastPerHour`; the interval is
 * widened for readings that remember the last one. The onset is a broken line through the same means, null when it fits none or bends
 * down; its interval takes the errors as independent and is then too narrow. Looks anew when a mean is complete; between, and through
 * a gap, the verdict stands. One wild reading in four moves nothing.
 * Sources: Theil–Sen and Kendall (stats/robust.ts), D. J. Hudson 1966 (stats/broken-stick.ts).
 * Errors: start throws CONFIG_RANGE unless the window is above 0, the slope 0 or more, the level 0.5 to below 1; step never throws.
 */
export const drift: Detector<DriftConfig, DriftState> = {
  name: 'drift',
  start({ windowHours, leastPerHour, level }) {
    if (!(windowHours > 0 && leastPerHour >= 0 && level >= 0.5 && level < 1))
      throw new MonitorError(
        'CONFIG_RANGE',
        `drift needs a window > 0 h, a slope >= 0 and a level in [0.5, 1), got ${windowHours}, ${leastPerHour}, ${level}`,
      )
    return { means: [], open: null, per: 1, verdict: quiet }
  },
  step(config, state, { tMs, z }) {
    if (z === null || !Number.isFinite(z)) return { state, verdict: state.verdict }
    // z + 0: −0 would not survive JSON.
    const open = join(state.open, { tMs, z: z + 0, count: 1 })
    if (open.count < state.per) return { state: { ...state, open }, verdict: state.verdict }
    const fromMs = tMs - config.windowHours * 3_600_000
    let means = [...state.means.filter((m) => m.tMs >= fromMs), open]
    let per = state.per
    if (means.length > MOST) {
      per *= 2
      means = pairs(means)
    }
    const verdict = judge(config, means)
    return { state: { means, open: null, per, verdict }, verdict }
  },
}

function join(a: Mean | null, b: Mean): Mean {
  if (a === null) return b
  const count = a.count + b.count
  return { tMs: a.tMs + ((b.tMs - a.tMs) * b.count) / count, z: a.z + ((b.z - a.z) * b.count) / count, count }
}

/** Neighbours joined two by two; of an odd number the oldest stays alone. */
function pairs(means: readonly Mean[]): Mean[] {
  const odd = means.length % 2
  const joined = means.slice(0, odd)
  for (let i = odd; i + 1 < means.length; i += 2) joined.push(join(means[i]!, means[i + 1]!))
  return joined
}

function judge({ leastPerHour, level }: DriftConfig, means: readonly Mean[]): Verdict {
  if (means.length < LEAST) return quiet
  const first = means[0]!.tMs
  const x = means.map((m) => (m.tMs - first) / 3_600_000)
  const y = means.map((m) => m.z)
  const plain = theilSen(x, y, level)
  if (plain === null || !(plain.low > leastPerHour)) return quiet
  // memory is read off a bent line: what a straight one leaves of a rise that began half way would pass for memory
  const bend = brokenStick(x, y, 0.9)
  const bent = (at: number) =>
    bend === null ? plain.slope * at : bend.slopeBefore * at + (bend.slopeAfter - bend.slopeBefore) * Math.max(0, at - bend.at)
  const slope = theilSen(x, y, level, memoryInflation(y.map((v, i) => v - bent(x[i]!))))
  if (slope === null || !(slope.low > leastPerHour)) return quiet
  const when = (hours: number) => Math.round(first + hours * 3_600_000)
  const onset =
    bend === null || bend.slopeAfter <= bend.slopeBefore
      ? null
      : { atMs: when(bend.at), lowMs: when(bend.low), highMs: when(bend.high) }
  return { kind: 'rising', perHour: slope.slope, lowPerHour: slope.low, highPerHour: slope.high, onset }
}
