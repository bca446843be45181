import type { RunRow, Service } from '../../server/wire/index.ts'
import { zoneClock } from '../model/clock.ts'
import { duration, fixed } from '../model/format.ts'
import { el, fill } from './dom.ts'
import { markView } from './mark.ts'
import { uploadView } from './upload.ts'
import type { Shell } from './watch.ts'

const clock = zoneClock('UTC')
const stateWords = { live: 'live now', importing: 'being read', ended: 'stored', failed: 'failed' }
const kindWords = { simulated: 'simulated', followed: 'followed file', imported: 'imported', uploaded: 'uploaded' }

/** All stored runs, newest first, and a place to bring one. */
export function runsView(service: Service, shell: Shell) {
  const body = el('tbody')
  const empty = el('p', { class: 'hush', text: 'No run is stored yet.' })
  const heads = ['Run', 'Skid', 'State', 'From, UTC', 'To, UTC', 'Length', 'Rows', 'Alarms', 'Furthest above clean', 'Source']
  const table = el(
    'table',
    { class: 'runs' },
    el('thead', {}, el('tr', {}, ...heads.map((h) => el('th', { scope: 'col', text: h })))),
    body,
  )
  const upload = uploadView(service, shell)
  const node = el(
    'main',
    { id: 'main', class: 'list', tabindex: -1 },
    el('h1', { text: 'Runs' }),
    el('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': 'Stored runs' }, table),
    empty,
    upload.node,
  )
  node.dataset['page'] = 'runs'

  return {
    node,
    show(runs: readonly RunRow[]): void {
      empty.hidden = runs.length > 0
      table.hidden = runs.length === 0
      fill(body, ...runs.map(rowOf))
      upload.skids(runs)
      node.dataset['count'] = String(runs.length)
    },
  }
}

function rowOf(r: RunRow): HTMLElement {
  const time = (t: number | null) => (t === null ? 'no reading yet' : clock.full(t))
  const counts = (['high', 'medium', 'low'] as const).filter((p) => r.alarms[p] > 0)
  return el(
    'tr',
    { 'data-run': r.run, 'data-state': r.state, 'data-title': r.title },
    el(
      'th',
      { scope: 'row' },
      el('a', { href: r.state === 'live' ? `#/watch/${r.run}` : `#/replay/${r.run}`, text: `${r.run} ${r.title}` }),
      r.state === 'live' ? el('p', {}, el('a', { href: `#/replay/${r.run}`, text: 'replay it so far' })) : null,
    ),
    el('td', { text: r.skid }),
    el(
      'td',
      {},
      r.progress !== null && r.state === 'importing'
        ? `${stateWords[r.state]}, ${fixed(100 * r.progress, 0)} %`
        : stateWords[r.state],
      r.fault === null ? null : el('p', { class: 'soft', text: r.fault }),
    ),
    el('td', { class: 'nowrap', text: time(r.fromMs) }),
    el('td', { class: 'nowrap', text: time(r.toMs) }),
    el('td', { class: 'nowrap', text: r.fromMs === null || r.toMs === null ? 'none' : duration(r.toMs - r.fromMs) }),
    el('td', { class: 'num', text: String(r.rows) }),
    el(
      'td',
      { class: 'nowrap' },
      ...(counts.length === 0
        ? ['none']
        : counts.flatMap((p) => [markView(p, r.state === 'live' ? 'ack' : 'latched'), ` ${r.alarms[p]} `])),
    ),
    el('td', {
      class: 'nowrap',
      text:
        r.fouling === null
          ? 'none fouled'
          : `${r.fouling.segment}${r.fouling.ratio === null ? '' : ` ${fixed(r.fouling.ratio, 2)} × clean`}`,
    }),
    el('td', { text: `${kindWords[r.kind]}: ${r.source}` }),
  )
}
