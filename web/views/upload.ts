import type { RunRow, Service, Upload, UploadBody } from '../../server/wire/index.ts'
import { postJson, putFile, said } from '../api.ts'
import { fixed } from '../model/format.ts'
import { el, fill, say } from './dom.ts'
import type { Shell } from './watch.ts'

/** A log to be read in: with a skid file or the skid of a run already stored, and an events file if there is one. */
export function uploadView(service: Service, shell: Shell) {
  const file = (name: string, accept: string, many = false) =>
    el('input', { type: 'file', name, id: `up-${name}`, accept, multiple: many })
  const stored = el('select', { id: 'up-stored', name: 'stored' })
  const skid = file('skid', '.yaml,.yml,.json')
  const log = file('log', '.csv,.txt,.tsv', true)
  const events = file('events', '.csv,.txt')
  const title = el('input', { type: 'text', name: 'title', id: 'up-title', maxlength: 80 })
  const start = el('input', { type: 'text', name: 'start', id: 'up-start', placeholder: '2031-05-05T18:00:00Z' })
  const says = el('p', { role: 'status', class: 'says' })
  const send = el('button', { type: 'submit', class: 'solid', text: 'Read it in' })
  const field = (label: string, input: HTMLElement) =>
    el('p', { class: 'field' }, el('label', { for: input.id, text: label }), input)
  const skidField = field('Skid file (YAML or JSON)', skid)
  const node = el(
    'form',
    { class: 'sheet upload', id: 'upload' },
    el('h2', { text: 'Bring a run' }),
    field('Skid', stored),
    skidField,
    field('Log, one or more CSV files', log),
    field('Events file, if there is one', events),
    field('Name of the run', title),
    field('Start, for logs without dates', start),
    el('p', {
      class: 'soft',
      text: `At most ${fixed(service.uploadMaxBytes / 2 ** 20, 0)} MiB a file. The log is analysed exactly as if it had been watched live.`,
    }),
    el('div', { class: 'row' }, send),
    says,
  )
  stored.addEventListener('change', () => {
    skidField.hidden = stored.value !== ''
  })
  node.addEventListener('submit', (event) => {
    event.preventDefault()
    if (send.getAttribute('aria-disabled') === 'true') return
    const missing = !shell.needPerson()
      ? 'Sign in first: the way is in the top strip.'
      : stored.value === '' && skid.files?.length !== 1
        ? 'Choose the skid file that says what the columns of the log are.'
        : log.files === null || log.files.length === 0
          ? 'Choose at least one log.'
          : ''
    say(says, missing)
    if (missing !== '') return
    send.setAttribute('aria-disabled', 'true')
    bring().then(
      (row) => {
        send.removeAttribute('aria-disabled')
        node.reset()
        skidField.hidden = false
        say(says, `Run ${row.run} is being read; it is in the list above.`)
      },
      (error: unknown) => {
        send.removeAttribute('aria-disabled')
        say(says, `Not taken: ${said(error)}`)
      },
    )
  })

  async function bring(): Promise<RunRow> {
    const logs = [...(log.files ?? [])]
    const skidFile = skid.files?.[0]
    const eventsFile = events.files?.[0]
    const body: UploadBody = {
      title: title.value.trim() === '' ? (logs[0]?.name ?? 'uploaded run') : title.value.trim(),
      skid:
        stored.value === '' && skidFile !== undefined
          ? { name: skidFile.name, text: await skidFile.text() }
          : { ofRun: Number(stored.value) },
      events: eventsFile === undefined ? null : { name: eventsFile.name, text: await eventsFile.text() },
      start: start.value.trim() === '' ? null : start.value.trim(),
    }
    const { upload } = await postJson<Upload>('/api/uploads', body)
    for (const l of logs) {
      say(says, `Sending ${l.name}.`)
      await putFile(`/api/uploads/${upload}/logs/${encodeURIComponent(l.name)}`, l)
    }
    return postJson<RunRow>(`/api/uploads/${upload}/import`, undefined)
  }

  let key = ''
  return {
    node,
    /** Skids of stored runs, to choose from instead of a file. */
    skids(runs: readonly RunRow[]): void {
      const latest = new Map<string, RunRow>()
      for (const r of runs) if ((latest.get(r.skid)?.run ?? 0) < r.run) latest.set(r.skid, r)
      const list = [...latest.values()].sort((a, b) => a.skid.localeCompare(b.skid))
      const k = JSON.stringify(list.map((r) => [r.skid, r.run]))
      if (k === key) return
      key = k
      const was = stored.value
      fill(
        stored,
        el('option', { value: '', text: 'from a file' }),
        ...list.map((r) => el('option', { value: r.run, text: `${r.skid}, as in run ${r.run}` })),
      )
      stored.value = list.some((r) => String(r.run) === was) ? was : ''
    },
  }
}
