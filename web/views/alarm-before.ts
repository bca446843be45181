import type { AlarmRow, AlarmStory } from '../../server/wire/index.ts'
import { getJson, said } from '../api.ts'
import type { ZoneClock } from '../model/clock.ts'
import { inPlantTime } from '../model/words.ts'
import { titleOf } from './alarm-row.ts'
import { openDialog } from './dialog.ts'
import { el, fill } from './dom.ts'

/** What led to an alarm, in one window: when it began, which alarm came first, and all that happened in the half hour before (USR-08). */
export function openBefore(run: number, alarm: AlarmRow, clock: ZoneClock): void {
  const waiting = el('p', { role: 'status', text: 'Fetching what came before.' })
  const dialog = openDialog(`Before: ${titleOf(alarm)}`, waiting)
  getJson<AlarmStory>(`/api/runs/${run}/alarms/${alarm.id}/before`).then(
    (story) => fill(dialog.body, ...storyNodes(run, story, clock)),
    (error: unknown) => fill(dialog.body, el('p', { role: 'alert', text: said(error) })),
  )
}

function storyNodes(run: number, s: AlarmStory, clock: ZoneClock): HTMLElement[] {
  const time = (iso: string): string => inPlantTime(iso, clock, s.toMs)
  const o = s.alarm.onset
  const facts = el('dl', { class: 'advice' })
  const fact = (k: string, v: string) => facts.append(el('dt', { text: k }), el('dd', { text: v }))
  fact(
    'Began',
    o === null
      ? 'no estimate for this kind of alarm'
      : `about ${time(o.at)}, between ${time(o.low)} and ${time(o.high)} (${Math.round(100 * o.level)} %)`,
  )
  fact(
    'First out',
    s.firstOut.id === s.alarm.id
      ? 'this alarm: none came in the 10 min before it'
      : `${titleOf(s.firstOut)} at ${clock.hms(s.firstOut.raisedMs)}`,
  )
  const rows = s.lines.map((l) =>
    el(
      'tr',
      { class: l.alarm === s.alarm.id ? 'mine' : '' },
      el('td', { class: 'nowrap', text: clock.hms(l.tMs) }),
      el('td', { text: { alarm: 'alarm', comment: 'comment', change: 'change', act: 'act', note: 'note' }[l.what] }),
      el('td', { text: inPlantTime(l.text, clock, s.toMs) }),
      el('td', { text: l.person ?? '' }),
    ),
  )
  const table = el(
    'table',
    {},
    el('caption', { text: `${clock.full(s.fromMs)} to ${clock.hms(s.toMs)} ${clock.offset(s.toMs)}, ${rows.length} entries` }),
    el('thead', {}, el('tr', {}, ...['Time', 'What', 'Said', 'Person'].map((t) => el('th', { scope: 'col', text: t })))),
    el('tbody', {}, ...rows),
  )
  const replay = el('a', { class: 'button small', href: `#/replay/${run}/${Math.round(s.toMs)}`, text: 'Replay at this moment' })
  return [
    facts,
    el('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': 'Entries' }, table),
    el('p', { class: 'row' }, replay),
  ]
}
