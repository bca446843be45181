import type { ActRow, ActSent, RunDetail } from '../../server/wire/index.ts'
import { getJson, postJson, said } from '../api.ts'
import { fromLocal, toLocal } from '../model/alarm-figures.ts'
import { zoneClock } from '../model/clock.ts'
import { entryKinds as kinds } from '../model/entry-kinds.ts'
import { entryText, readSetting } from '../model/settings.ts'
import { el, fill, say } from './dom.ts'
import { fieldOf, formOf } from './form.ts'
import type { Shell } from './watch.ts'

/** Results and changes entered by hand on a run, and all that was. */
export function entriesView(detail: RunDetail, shell: Shell) {
  const { skidFacts: facts } = detail
  const clock = zoneClock(facts.timeZone)
  const url = `/api/runs/${detail.run}/acts`
  const isLive = detail.state === 'live'
  const what = el('select', { id: 'event' }, ...kinds.map((k) => el('option', { value: k.kind, text: k.text })))
  const of = el('select', { id: 'of' })
  const value = el('input', { type: 'text', id: 'value', inputmode: 'decimal', autocomplete: 'off' })
  const unit = el('select', { id: 'unit', 'aria-label': 'Unit' })
  const taken = el('input', { type: 'text', id: 'taken', placeholder: 'now', autocomplete: 'off' })
  const note = el('input', { type: 'text', id: 'note', maxlength: 500, autocomplete: 'off' })
  const does = el('p', { class: 'soft' })
  const ofField = fieldOf('Of', of)
  const valueField = fieldOf('Value', value, null, el('span', { class: 'value' }, value, unit))
  const takenField = fieldOf(
    'Sample taken',
    taken,
    `Empty: now. Else its time, ${facts.timeZone}, such as ${toLocal(detail.toMs ?? 0, clock.offsetMs)}.`,
  )
  const rows = el('tbody')
  const none = el('p', { class: 'hush', text: 'Nothing has been entered on this run.' })
  const says = el('p', { role: 'status', class: 'says' })

  const chosen = () => kinds.find((k) => k.kind === what.value)!
  function kindChanged(): void {
    const k = chosen()
    const streams = facts.streams.map((s) => [s.id, `${s.id} ${s.title}`] as const)
    const segments = facts.segments
      .filter((s) => k.kind !== 'filter change' || s.kind === 'filter')
      .map((s) => [s.id, `${s.id} ${s.title}`] as const)
    const ids =
      k.of === 'stream' ? streams : k.of === 'segment' ? segments : [['', 'the whole skid'] as const, ...streams, ...segments]
    fill(of, ...ids.map(([id, text]) => el('option', { value: id, text })))
    fill(unit, ...k.units.map((u) => el('option', { value: u, text: u })))
    ofField.hidden = k.of === 'none'
    valueField.hidden = k.units.length === 0
    takenField.hidden = k.kind === 'comment'
    say(does, isLive ? k.does : 'The run has ended: the entry is kept beside it, nothing is calculated anew.')
  }
  what.addEventListener('change', kindChanged)

  const form = formOf(
    { id: 'enter', title: 'Enter a result or a change', send: 'Enter' },
    async () => {
      if (!shell.needPerson()) return 'Not done: sign in first'
      const k = chosen()
      const read = k.units.length === 0 ? { value: null } : readSetting({ kind: 'number' }, value.value)
      if (typeof read === 'string') return `Not done: ${read}`
      const text = taken.value.trim()
      const atMs = text === '' || k.kind === 'comment' ? null : fromLocal(text, clock.offsetMs)
      if (text !== '' && k.kind !== 'comment' && atMs === null)
        return 'Not done: no time of the kind 2031-01-14 03:12 – leave it empty for now'
      const body: ActSent =
        k.kind === 'comment'
          ? { kind: 'comment', alarm: null, text: note.value }
          : {
              kind: 'event', event: k.kind, value: read.value as number | null, unit: read.value === null ? null : unit.value, note: note.value,
              of: of.value === '' ? null : of.value, atMs,
            } // biome-ignore format: an act
      await postJson(url, body)
      value.value = note.value = taken.value = ''
      await load()
      return 'Entered.'
    },
    fieldOf('What', what),
    ofField,
    valueField,
    takenField,
    fieldOf('Note', note, 'Drum, lot, method, what was seen.'),
    does,
  )
  const table = el(
    'table',
    { class: 'runs' },
    el('caption', { class: 'vh', text: 'Entries, newest first' }),
    el('thead', {}, el('tr', {}, ...['Entered', 'What', 'Sample taken', 'Who'].map((h) => el('th', { scope: 'col', text: h })))),
    rows,
  )
  const node = el(
    'main',
    { id: 'main', class: 'list desk settings', tabindex: -1 },
    el('h1', { text: `Entries on run ${detail.run} of skid ${detail.skid}${isLive ? '' : ', which has ended'}` }),
    el(
      'div',
      { class: 'pair' },
      form,
      el(
        'section',
        { class: 'stack', 'aria-label': 'Entries' },
        none,
        el('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': 'All entries' }, table),
        says,
      ),
    ),
  )
  node.dataset['page'] = 'entries'

  async function load(): Promise<void> {
    try {
      const acts = await getJson<ActRow[]>(url)
      const entries = acts.flatMap((a) => {
        const text = entryText(a.act)
        return text === null ? [] : [{ ...a, text }]
      })
      none.hidden = entries.length > 0
      table.hidden = entries.length === 0
      fill(rows, ...entries.toReversed().map(rowOf))
      node.dataset['ready'] = 'true'
      node.dataset['entries'] = String(entries.length)
    } catch (error) {
      say(says, said(error))
    }
  }
  function rowOf({ seq, act, text }: ActRow & { readonly text: string }): HTMLElement {
    const sampled = act.kind === 'event' && act.atMs != null ? clock.full(act.atMs) : ''
    return el(
      'tr',
      {},
      el('th', { scope: 'row' }, clock.full(act.tMs), seq === null ? el('p', { class: 'soft', text: 'after the end' }) : null),
      el('td', { text }),
      el('td', { text: sampled }),
      el('td', { text: act.person }),
    )
  }

  kindChanged()
  void load()
  return { node, title: `Entries on ${detail.skid}`, stop: () => undefined }
}
