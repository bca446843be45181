import { MonitorError } from '../errors.ts'
import type { Skid } from '../skid.ts'
import { endOf, eventsOf, exothermKinds, faultKinds, growthLaws, type Scenario, timeOf } from './scenario.ts'
import { scheduleOf } from './schedule.ts'

const fail = (message: string, hint?: string): never => {
  throw new MonitorError('SIM_OPTION', message, hint === undefined ? {} : { hint })
}

const oneOf = (what: string, name: string | null, known: readonly string[]): void => {
  if (name === null || !known.includes(name)) fail(`unknown ${what} '${name ?? ''}'`, `one of ${known.join(', ')}`)
}

const between = (what: string, value: number, low: number, high: number): void => {
  if (!(value >= low && value <= high)) fail(`${what} must be ${low} to ${high}, got ${value}`)
}

/**
 * Refuses a scenario that does not fit the skid: names that are not there, sizes out of range, events outside the run, growths that
 * overlap on one segment. Errors: SIM_OPTION.
 */
export function checkScenario(skid: Skid, scenario: Scenario): void {
  const segments = skid.segments.map((s) => s.id)
  const streams = skid.streams.map((s) => s.id)
  const tags = skid.tags.map((t) => t.tag)
  between('hours', scenario.hours, 1 / 3600, 100_000)
  between('log seconds', scenario.logSeconds, 0.01, 600)
  between('noise', scenario.noise, 0, 10)
  between('seed', scenario.seed, 0, Number.MAX_SAFE_INTEGER)
  if (!Number.isSafeInteger(scenario.seed)) fail(`seed must be a whole number, got ${scenario.seed}`)
  for (const [id, value] of Object.entries(scenario.flows ?? {})) {
    oneOf('stream', id, streams)
    between(`flow of ${id}`, value, 1e-6, 1e9)
  }
  for (const share of ['missing', 'duplicate', 'outOfOrder', 'broken'] as const)
    between(`dirt.${share}`, scenario.dirt[share], 0, 0.5)
  for (const e of scenario.events) {
    if (!(timeOf(scenario, e) >= scenario.fromMs && timeOf(scenario, e) < endOf(scenario)))
      fail(`${e.kind} at ${e.atHours} h is outside the run of ${scenario.hours} h`)
    if ('segment' in e) oneOf('segment', e.segment, segments)
    if ('stream' in e && (e.kind !== 'exotherm' || e.what === 'dosing-ratio')) oneOf('stream', e.stream, streams)
    if ('tag' in e) oneOf('tag', e.tag, tags)
    if ('factor' in e) between(`factor of ${e.kind}`, e.factor, 0.01, 10)
    if (e.kind === 'fouling') {
      oneOf('growth law', e.law, growthLaws)
      between('hours to limit', e.hoursToLimit, 0.02, 10_000)
      if (e.localFraction !== null) between('local fraction', e.localFraction, 0.02, 1)
      between('sloughs', e.sloughs, 0, 20)
    }
    if (e.kind === 'exotherm') {
      oneOf('kind of exotherm', e.what, exothermKinds)
      between('amplitude', e.amplitudeC, 0.1, 200)
      between('duration of an exotherm in seconds', e.lastsS, 1, 86_400)
      if (skid.segments.find((s) => s.id === e.segment)?.temperatures.length === 0)
        fail(`segment ${e.segment} has no temperatures, an exotherm there would be unseen`)
    }
    if (e.kind === 'sensor') oneOf('sensor fault', e.fault, faultKinds)
    if (e.kind === 'nanGap' && e.tags !== 'all') for (const t of e.tags) oneOf('tag', t, tags)
    if (e.kind === 'flush') between('recovery', e.recovery, 0, 1)
    if (e.kind === 'filterChange' && skid.segments.find((s) => s.id === e.segment)?.kind !== 'filter')
      fail(`segment ${e.segment} is no filter`)
  }
  checkGrowths(scenario)
}

/** One growth at a time on a segment, begun in production; the next one only after a flush or a change has ended the last. */
function checkGrowths(scenario: Scenario): void {
  const spans = scheduleOf(scenario)
  const growths = eventsOf(scenario, 'fouling')
  for (const [i, g] of growths.entries()) {
    const t = timeOf(scenario, g)
    if (spans.find((s) => t >= s.fromMs && t < s.toMs)?.phase !== 'production')
      fail(`fouling of ${g.segment} at ${g.atHours} h does not begin in production`)
    const last = growths.slice(0, i).findLast((other) => other.segment === g.segment)
    if (last === undefined) continue
    const ended = [
      ...eventsOf(scenario, 'flush'),
      ...eventsOf(scenario, 'filterChange').filter((c) => c.segment === g.segment),
    ].some((e) => e.atHours > last.atHours && e.atHours < g.atHours)
    if (!ended)
      fail(
        `fouling of ${g.segment} at ${g.atHours} h begins while the one from ${last.atHours} h still grows`,
        'put a flush event between them',
      )
  }
}
