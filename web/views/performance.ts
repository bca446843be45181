import type { AlarmPerformance, RunDetail } from '../../server/wire/index.ts'
import { getJson, said } from '../api.ts'
import { figureText, verdictText } from '../model/alarm-figures.ts'
import { zoneClock } from '../model/clock.ts'
import { duration, fixed } from '../model/format.ts'
import { count, el, fill } from './dom.ts'
import { type Period, periodView } from './period.ts'

const table = (
  caption: string,
  heads: readonly string[],
  rows: readonly (readonly (string | Node)[])[],
  numbers: readonly number[] = [],
) =>
  el(
    'div',
    { class: 'wide', role: 'region', tabindex: 0, 'aria-label': caption },
    el(
      'table',
      { class: 'alarm-table' },
      el('caption', { text: caption }),
      el(
        'thead',
        {},
        el('tr', {}, ...heads.map((t, i) => el('th', { scope: 'col', class: numbers.includes(i) ? 'num' : '', text: t }))),
      ),
      el(
        'tbody',
        {},
        ...rows.map((r) =>
          el(
            'tr',
            {},
            ...r.map((c, i) =>
              el(i === 0 ? 'th' : 'td', { scope: i === 0 ? 'row' : null, class: numbers.includes(i) ? 'num' : '' }, c),
            ),
          ),
        ),
      ),
    ),
  )

/** How the alarms of a run do against what is recommended for one operator, over any period (ALM-13, USR-01). */
export function performanceView(detail: RunDetail) {
  const clock = zoneClock(detail.skidFacts.timeZone)
  const span: Period = { fromMs: detail.fromMs ?? 0, toMs: Math.max(detail.clock?.nowMs ?? 0, detail.toMs ?? 0) }
  const body = el('div', { class: 'alarm-figures' })
  const period = periodView(span, clock, detail.skidFacts.timeZone, ['8h', '24h', '7d', '30d', 'all'], 'all', (p) => void load(p))
  const node = el(
    'main',
    { id: 'main', class: 'list desk', tabindex: -1 },
    el('h1', { text: `How the alarms do, skid ${detail.skid}, run ${detail.run}` }),
    period.node,
    body,
  )
  node.dataset['page'] = 'alarms'
  let asked: AbortController | null = null

  async function load(p: Period): Promise<void> {
    asked?.abort()
    asked = new AbortController()
    try {
      const query = new URLSearchParams({ fromMs: String(Math.round(p.fromMs)), toMs: String(Math.round(p.toMs)) })
      const m = await getJson<AlarmPerformance>(`/api/runs/${detail.run}/alarm-performance?${query}`, asked.signal)
      fill(body, ...sections(m))
      node.dataset['ready'] = `${m.fromMs} ${m.toMs}`
    } catch (error) {
      if (!(error instanceof DOMException)) fill(body, el('p', { role: 'alert', class: 'refused', text: said(error) }))
    }
  }

  function sections(m: AlarmPerformance): HTMLElement[] {
    const name = (key: string): string => m.names[key] ?? key
    const at = (tMs: number): string => `${clock.day(tMs)} ${clock.hms(tMs)}`
    const line = `${clock.full(m.fromMs)} ${clock.offset(m.fromMs)} to ${clock.full(m.toMs)} ${clock.offset(m.toMs)}: ${fixed(m.hours, 1)} h, ${count(m.records, 'record')}, ${count(m.annunciated, 'annunciated alarm')}, ${count(m.refused, 'refused request')}`
    const listOf = (
      title: string,
      none: string,
      heads: readonly string[],
      rows: readonly (readonly string[])[],
      numbers: readonly number[],
    ) =>
      rows.length === 0
        ? el('section', {}, el('h2', { text: title }), el('p', { class: 'soft', text: none }))
        : el('section', {}, table(title, heads, rows, numbers))
    return [
      el('p', { text: line }),
      m.label === null ? el('p', { text: 'At least 30 days.' }) : el('p', {}, el('span', { class: 'tag inv', text: m.label })),
      table(
        'Figures for one operator position',
        ['Figure', 'Target', 'Value', 'Target met', 'Rests on'],
        m.table.map((r) => [r.metric, r.target, figureText(r), r.met === false ? el('b', { text: verdictText(r.met) }) : verdictText(r.met), r.basis]),
        [2],
      ),
      el('div', { class: 'two' },
        listOf('Ten most frequent', 'No alarm called anybody.', ['Alarm', 'Times', 'Share'], m.mostFrequent.map((f) => [name(f.key), String(f.count), `${fixed(100 * f.share, 1)} %`]), [1, 2]),
        listOf('Put aside, not counted above', 'No alarm was active while it was shelved, suppressed or out of service.', ['Alarm', 'Times active'], m.suppressed.map((f) => [name(f.key), String(f.count)]), [1]),
        listOf('Chattering: three times in one minute', 'None.', ['Alarm', 'From'], m.chattering.map((c) => [name(c.key), at(c.atMs)]), []),
        listOf('Fleeting: gone in seconds, nobody acted', 'None.', ['Alarm', 'At', 'Lasted'], m.fleeting.map((f) => [name(f.key), at(f.atMs), `${fixed(f.lastedS, 0)} s`]), [2]),
        listOf('Stale: active for over 24 h', 'None.', ['Alarm', 'Since', 'For'], m.stale.map((s) => [name(s.key), at(s.fromMs), duration(3.6e6 * s.hours)]), [2]),
        listOf('Floods', 'None.', ['From', 'To', 'Alarms'], m.floods.map((f) => [at(f.fromMs), at(f.toMs), String(f.count)]), [2]),
      ),
      el('p', { class: 'soft', text: 'Targets: EEMUA 191 as quoted in the trade literature, ISA-18.2 clause 16 (from memory). Windows are those of the clock. Each chattering, fleeting or stale alarm needs a plan of its own.' }),
    ] // biome-ignore format: a page
  }

  period.begin()
  return { node, title: `Alarms of ${detail.skid}`, stop: () => asked?.abort() }
}
