import type { RunRow, Service } from '../../server/wire/index.ts'
import { postForm, said } from '../api.ts'
import { zoneClock } from '../model/clock.ts'
import { duration, fixed } from '../model/format.ts'
import { el, fill, say } from './dom.ts'
import { markView } from './mark.ts'
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
  const node = el(
    'main',
    { id: 'main', class: 'list', tabindex: -1 },
    el('h1', { text: 'Runs' }),
    el('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': 'Stored runs' }, table),
    empty,
    uploadView(service, shell),
  )
  node.dataset['page'] = 'runs'

  return {
    node,
    show(runs: readonly RunRow[]): void {
      empty.hidden = runs.length > 0
      table.hidden = runs.length === 0
      fill(body, ...runs.map(rowOf))
      node.dataset['count'] = String(runs.length)
    },
  }
}

function rowOf(r: RunRow): HTMLElement {
  const time = (t: number | null) => (t === null ? 'no reading yet' : clock.full(t))
  const counts = (['high', 'medium', 'low'] as const).filter((p) => r.alarms[p] > 0)
  return el(
    'tr',
    { 'data-run': r.run, 'data-state': r.state },
    el(
      'th',
      { scope: 'row' },
      el('a', { href: r.state === 'live' ? `#/watch/${r.run}` : `#/replay/${r.run}`, text: `${r.run} ${r.title}` }),
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

/** A log with its skid file, and an events file if there is one. */
function uploadView(service: Service, shell: Shell): HTMLElement {
  const file = (name: string, accept: string, many = false) =>
    el('input', { type: 'file', name, id: `up-${name}`, accept, multiple: many, required: name !== 'events' })
  const skid = file('skid', '.yaml,.yml,.json')
  const log = file('log', '.csv,.txt,.tsv', true)
  const events = file('events', '.csv,.txt')
  const title = el('input', { type: 'text', name: 'title', id: 'up-title', maxlength: 80 })
  const says = el('p', { role: 'status', class: 'says' })
  const send = el('button', { type: 'submit', class: 'solid', text: 'Read it in' })
  const field = (label: string, input: HTMLInputElement) =>
    el('p', { class: 'field' }, el('label', { for: input.id, text: label }), input)
  const form = el(
    'form',
    { class: 'sheet upload', id: 'upload' },
    el('h2', { text: 'Bring a run' }),
    field('Skid file (YAML or JSON)', skid),
    field('Log, one or more CSV files', log),
    field('Events file, if there is one', events),
    field('Name of the run', title),
    el('p', {
      class: 'soft',
      text: `At most ${fixed(service.uploadMaxBytes / 1e6, 0)} MB together. The log is analysed exactly as if it had been watched live.`,
    }),
    el('div', { class: 'row' }, send),
    says,
  )
  form.addEventListener('submit', (event) => {
    event.preventDefault()
    if (!shell.needPerson()) {
      say(says, 'Say who you are first: your name is asked for in the top strip.')
      return
    }
    const files = [...(skid.files ?? []), ...(log.files ?? []), ...(events.files ?? [])]
    if (files.reduce((n, f) => n + f.size, 0) > service.uploadMaxBytes) {
      say(says, 'These files are larger than the server takes; use `clearbore import` on its machine.')
      return
    }
    const data = new FormData()
    data.append('title', title.value.trim() === '' ? (log.files?.[0]?.name ?? 'uploaded run') : title.value.trim())
    data.append('person', shell.person())
    for (const f of skid.files ?? []) data.append('skid', f)
    for (const f of log.files ?? []) data.append('log', f)
    for (const f of events.files ?? []) data.append('events', f)
    send.setAttribute('aria-disabled', 'true')
    say(says, 'Sending.')
    postForm<RunRow>('/api/uploads', data).then(
      (row) => {
        send.removeAttribute('aria-disabled')
        form.reset()
        say(says, `Run ${row.run} is being read; it is in the list above.`)
      },
      (error: unknown) => {
        send.removeAttribute('aria-disabled')
        say(says, `Not taken: ${said(error)}`)
      },
    )
  })
  return form
}
