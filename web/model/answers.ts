import type { AlarmRow, LiveState, SegmentFacts, SegmentState, SkidFacts } from '../../server/wire/index.ts'
import type { ZoneClock } from './clock.ts'
import { duration, figure, fixed, range, unitText } from './format.ts'
import { adviceInForce, urgencyOf, weight } from './in-force.ts'
import { actionWords, causeWords, inPlantTime, kindWords, limitWords } from './words.ts'

/** One of the four answers: what is read from three metres, and the sentence below that says on what it rests. */
export interface Answer {
  readonly far: string
  /** Smaller, after `far`: a unit, or the upper end of a range. */
  readonly unit: string | null
  readonly to: string | null
  readonly below: string
}

export interface Answers {
  /** Segment that the answers are about; null when nothing stands. */
  readonly segment: string | null
  readonly alarm: AlarmRow | null
  readonly where: Answer
  readonly howBad: Answer
  readonly howLong: Answer
  readonly whatNow: Answer
}

const answer = (far: string, below: string, unit: string | null = null, to: string | null = null): Answer => ({
  far,
  unit,
  to,
  below,
})

/** The standing alarm that the answers are about: most urgent priority, then fastest hazard, then the one furthest above clean. */
export function leading(state: LiveState): AlarmRow | null {
  const ratio = (a: AlarmRow) => state.segments.find((s) => s.segment === a.segment)?.ratio ?? 0
  const standing = state.alarms.filter((a) => a.active && a.state !== 'SHELVED' && a.state !== 'SBD' && a.state !== 'OOS')
  return (
    standing.sort(
      (a, b) =>
        weight[b.priority] - weight[a.priority] ||
        urgencyOf(a.kind) - urgencyOf(b.kind) ||
        ratio(b) - ratio(a) ||
        b.raisedMs - a.raisedMs,
    )[0] ?? null
  )
}

/** Where, how bad, how long, what now. Null state: nothing is known yet. */
export function answersOf(facts: SkidFacts, state: LiveState, clock: ZoneClock): Answers {
  const alarm = leading(state)
  const spec = facts.segments.find((s) => s.id === alarm?.segment)
  const now = state.segments.find((s) => s.segment === alarm?.segment)
  const whatNow = nowOf(state, clock, alarm)
  if (alarm === null) return { segment: null, alarm, ...quiet(state, clock), whatNow }
  return {
    segment: alarm.segment,
    alarm,
    where: answer(
      alarm.segment ?? alarm.tag ?? 'Skid',
      [kindWords[alarm.kind], alarm.cause === null ? null : causeWords[alarm.cause], placeOf(alarm, spec)]
        .filter(Boolean)
        .join(', '),
    ),
    howBad: badOf(alarm, now, spec),
    howLong: longOf(alarm, now, state.clock.nowMs, clock),
    whatNow,
  }
}

function placeOf(alarm: AlarmRow, spec: SegmentFacts | undefined): string | null {
  if (spec === undefined) return null
  if (alarm.tag !== null) return alarm.tag
  return (
    spec.dpTag ??
    (spec.pressureIn !== null && spec.pressureOut !== null ? `${spec.pressureIn} to ${spec.pressureOut}` : spec.pressureIn)
  )
}

/** The time that a forecast leaves, as a range, and what it ends at. */
function untilLimit(
  f: NonNullable<SegmentState['forecast']>,
  nowMs: number,
  clock: ZoneClock,
  place: string | null = null,
): Answer {
  const { low, high } = range(f.lowMs - nowMs, f.highMs - nowMs)
  const limit = `${f.limitBar === null ? '' : `${fixed(f.limitBar, 1)} bar `}${limitWords[f.limit].name}`
  return answer(
    low,
    `${place === null ? '' : `${place} `}to the ${limit}, ${clock.hm(f.lowMs)} to ${clock.hm(f.highMs)} (${Math.round(100 * f.level)} %)`,
    null,
    high,
  )
}

function badOf(alarm: AlarmRow, now: SegmentState | undefined, spec: SegmentFacts | undefined): Answer {
  const ratio = fixed(now?.ratio, 2)
  const dp = now?.dpBar == null ? null : `ΔP ${fixed(now.dpBar, 2)} bar`
  const clean = now?.cleanDpBar == null ? null : `clean would be ${fixed(now.cleanDpBar, 2)} bar`
  if (alarm.kind === 'fouling') {
    if (ratio === null) return answer('not known', dp ?? 'no ratio: readings bad or not in production')
    return answer(ratio, [dp, clean].filter(Boolean).join(', '), '× clean')
  }
  if (alarm.kind === 'dp-limit' && now?.dpNowBar != null)
    return answer(
      fixed(now.dpNowBar, 2)!,
      [limitOf(alarm), ratio === null ? null : `${ratio} × clean`].filter(Boolean).join(', '),
      'bar',
    )
  const hot = hottest(now)
  if ((alarm.kind === 'exotherm' || alarm.kind === 'temperature-limit') && hot !== null)
    return answer(
      fixed(hot.tempC, 1)!,
      `${hot.tag}, the highest of ${spec?.id ?? 'it'}; ${alarm.kind === 'exotherm' ? `${figure(alarm.value, alarm.unit)} above what coolant and feeds explain when raised` : limitOf(alarm)}`,
      '°C',
    )
  const value = fixed(alarm.value, 2)
  return value === null
    ? answer('see alarm', alarm.message)
    : answer(value, `when raised; ${limitOf(alarm)}`.replace(/; $/, ''), unitText(alarm.unit))
}

const limitOf = (alarm: AlarmRow): string => (alarm.limit === null ? '' : `limit ${figure(alarm.limit, alarm.unit)}`)
const hottest = (now: SegmentState | undefined) =>
  (now?.temperatures ?? []).reduce<{ tag: string; tempC: number } | null>(
    (top, t) => (t.tempC !== null && (top === null || t.tempC > top.tempC) ? { tag: t.tag, tempC: t.tempC } : top),
    null,
  )

/** Always a range, never a single time. */
function longOf(alarm: AlarmRow, now: SegmentState | undefined, nowMs: number, clock: ZoneClock): Answer {
  const f = now?.forecast ?? null
  const limit = now?.limits.dpHighBar ?? now?.limits.dpHighHighBar ?? null
  const isDeposit = alarm.kind === 'fouling' || alarm.kind === 'dp-limit'
  if (isDeposit && limit !== null && now?.dpNowBar != null && now.dpNowBar >= limit)
    return answer('limit met', `ΔP ${fixed(now.dpNowBar, 2)} bar, limit ${fixed(limit, 1)} bar`)
  // The forecast is the deposit's: it says nothing of heat, flow or a sensor.
  if (f !== null && isDeposit) return untilLimit(f, nowMs, clock)
  if (alarm.help !== null && !isDeposit)
    return answer(duration(alarm.help.timeToRespondS * 1000), 'time to respond by the alarm’s rationalisation; no forecast')
  return answer(
    'no forecast',
    now?.growthPerHour == null
      ? 'growth not yet sure enough'
      : `grows ${fixed(now.growthPerHour, 2)} a hour; no limit within reach`,
  )
}

const isAside = (a: AlarmRow): boolean => a.active && (a.state === 'SHELVED' || a.state === 'SBD' || a.state === 'OOS')
const asideWords = (aside: readonly AlarmRow[]): string =>
  aside
    .map(
      (a) =>
        `${a.segment ?? a.tag ?? 'skid'} ${kindWords[a.kind]} ${a.state === 'SHELVED' ? 'shelved' : a.state === 'SBD' ? 'suppressed' : 'out of service'}`,
    )
    .join(', ')

/** No alarm stands. What is put aside while its condition is there is still said: a screen that says steady then would lie. */
function quiet(state: LiveState, clock: ZoneClock): Pick<Answers, 'where' | 'howBad' | 'howLong'> {
  const known = state.segments.filter((s) => s.ratio !== null)
  const top = known.reduce<SegmentState | null>((t, s) => (t === null || s.ratio! > t.ratio! ? s : t), null)
  const based = state.segments.filter((s) => s.baseline !== null).length
  const soonest = state.segments
    .flatMap((s) => (s.forecast === null ? [] : [{ segment: s.segment, ...s.forecast }]))
    .sort((a, b) => a.lowMs - b.lowMs)[0]
  const howLong =
    soonest === undefined ? answer('no limit', 'nothing grows') : untilLimit(soonest, state.clock.nowMs, clock, soonest.segment)
  const aside = state.alarms.filter(isAside)
  if (top === null)
    return {
      where: answer('not yet', based === 0 ? 'no clean baseline yet, so no verdict' : 'no ratio now: not in production'),
      howBad: answer('not known', 'no ratio of resistance to clean'),
      howLong: answer('not known', 'no forecast without a ratio'),
    }
  return {
    where:
      aside.length > 0
        ? answer('Put aside', asideWords(aside))
        : answer('All steady', `no alarm stands; ${known.length} of ${state.segments.length} segments judged`),
    howBad: answer(fixed(top.ratio, 2)!, `the highest, ${top.segment}`, '× clean'),
    howLong,
  }
}

function nowOf(state: LiveState, clock: ZoneClock, alarm: AlarmRow | null): Answer {
  const advice = adviceInForce(state)[0]?.advice
  if (advice === undefined)
    return alarm === null
      ? state.alarms.some(isAside)
        ? answer('See the list', 'nothing calls, but not all is well: what is put aside is in the list')
        : answer('Carry on', 'nothing advised; keep to the site procedure')
      : answer('See the alarm', 'no advice beyond the text of the alarm')
  const reason = inPlantTime(advice.reason, clock, state.clock.nowMs)
  return answer(
    actionWords[advice.action],
    `${advice.segments.length === 0 || reason.startsWith(advice.segments[0]!) ? '' : `for ${advice.segments.join(', ')}: `}${firstClause(reason)}`,
  )
}

const firstClause = (text: string): string => {
  const end = text.search(/[;.] /)
  return end < 0 || end > 140 ? (text.length > 140 ? `${text.slice(0, 139)}…` : text) : text.slice(0, end)
}
