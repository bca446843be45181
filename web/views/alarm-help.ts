import type { AlarmRow } from '../../server/wire/index.ts'
import type { ZoneClock } from '../model/clock.ts'
import { duration } from '../model/format.ts'
import { inPlantTime } from '../model/words.ts'
import { el } from './dom.ts'

/** Everything about this one alarm: what to look at, what to do, how long there is, what happens otherwise, what it rests on. */
export function alarmHelp(alarm: AlarmRow, clock: ZoneClock): HTMLElement {
  const pairs: [string, string][] = []
  const at = (texts: readonly string[]): string => inPlantTime(texts.join('; '), clock, alarm.raisedMs)
  const h = alarm.help
  if (h !== null)
    pairs.push(
      ['Check', h.check],
      ['Action', h.action],
      ['Time', `${duration(h.timeToRespondS * 1000)} to respond`],
      ['If not', h.consequence],
      ['Causes', h.causes],
    )
  pairs.push(['Message', inPlantTime(alarm.message, clock, alarm.raisedMs)])
  if (alarm.evidence.for.length > 0) pairs.push(['Speaks for', at(alarm.evidence.for)])
  if (alarm.evidence.against.length > 0) pairs.push(['Against', at(alarm.evidence.against)])
  if (alarm.evidence.notExcluded.length > 0) pairs.push(['Not ruled out', at(alarm.evidence.notExcluded)])
  if (alarm.onset !== null) {
    const [began, low, high] = [alarm.onset.at, alarm.onset.low, alarm.onset.high].map((t) => clock.hm(Date.parse(t)))
    pairs.push(['Began', `${began}, between ${low} and ${high} (${Math.round(100 * alarm.onset.level)} %)`])
  }
  if (alarm.acknowledgedMs !== null)
    pairs.push(['Owned by', `${alarm.acknowledgedBy ?? 'not known'} since ${clock.hms(alarm.acknowledgedMs)}`])
  if (alarm.aside !== null) {
    const { person, logic, reason, sinceMs } = alarm.aside
    pairs.push(['Put aside', `${[person ?? logic, reason].filter((t) => t !== null).join(': ')}, since ${clock.hms(sinceMs)}`])
  }
  pairs.push(['Found by', alarm.detector], ['Number', String(alarm.id)])
  if (h !== null) pairs.push(['Text', h.review])
  const list = el('dl', { class: 'advice' })
  for (const [k, v] of pairs) list.append(el('dt', { text: k }), el('dd', { text: v }))
  return list
}
