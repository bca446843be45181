import type { RunDetail, SettingRow, SettingsComparison, SettingsPage, SettingsSent, VersionRow } from '../../server/wire/index.ts'
import { getJson, postJson, said } from '../api.ts'
import { zoneClock } from '../model/clock.ts'
import { changeText, pathText, settingText } from '../model/settings.ts'
import { openForm } from './dialog.ts'
import { el, fill, say } from './dom.ts'
import { settingsChange } from './settings-change.ts'
import { suppressionForm } from './settings-suppression.ts'
import type { Shell } from './watch.ts'

/** Settings of a skid: what is in force, every version with who and why, two of them compared, and a change where a run lives. */
export function settingsView(detail: RunDetail, shell: Shell) {
  const clock = zoneClock(detail.skidFacts.timeZone)
  const base = `/api/skids/${encodeURIComponent(detail.skid)}/settings`
  const title = el('h1')
  const fixed = el('p', { class: 'soft' })
  const versions = el('tbody')
  const none = el('p', { class: 'hush', text: 'No version yet: what is in force is the skid file as the run began with it.' })
  const compared = el('div', { 'aria-live': 'polite' })
  const from = el('select', { id: 'from' })
  const to = el('select', { id: 'to' })
  const says = el('p', { role: 'status', class: 'says' })
  const when = (tMs: number): string => `${clock.full(tMs)} ${clock.offset(tMs)}`
  const change = settingsChange(detail, clock, base, () => void load())
  const suppression = suppressionForm(detail, base, () => void load())
  const closed = el('p', { class: 'note' })
  const compare = el(
    'form',
    { class: 'row', 'aria-label': 'Compare two versions' },
    el('label', { for: 'from', text: 'From version' }),
    from,
    el('label', { for: 'to', text: 'to version' }),
    to,
    el('button', { type: 'submit', class: 'small', text: 'Compare' }),
  )
  // Until somebody picks, the last two.
  let picked = false
  for (const select of [from, to])
    select.addEventListener('change', () => {
      picked = true
    })
  compare.addEventListener('submit', (event) => {
    event.preventDefault()
    void show(Number(from.value), Number(to.value))
  })
  const table = el(
    'table',
    { class: 'runs versions' },
    el('caption', { class: 'vh', text: 'Versions, newest first' }),
    el(
      'thead',
      {},
      el(
        'tr',
        {},
        ...['Version', 'In force from', 'What changed, old → new', 'Why', 'Who'].map((h) => el('th', { scope: 'col', text: h })),
      ),
    ),
    versions,
  )
  const node = el(
    'main',
    { id: 'main', class: 'list desk settings', tabindex: -1 },
    title,
    says,
    el('div', { class: 'pair' }, change.node, suppression),
    closed,
    el(
      'section',
      { class: 'stack', 'aria-labelledby': 'versions-title' },
      el('h2', { id: 'versions-title', text: 'Versions' }),
      none,
      el('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': 'All versions' }, table),
      compare,
      compared,
    ),
    fixed,
  )
  node.dataset['page'] = 'settings'

  async function load(): Promise<void> {
    try {
      const page = await getJson<SettingsPage>(base)
      draw(page)
      node.dataset['ready'] = 'true'
      node.dataset['version'] = String(page.version)
    } catch (error) {
      say(says, said(error))
    }
  }

  function draw(page: SettingsPage): void {
    say(title, `Settings of skid ${page.skid}${page.version === 0 ? '' : `, version ${page.version} in force`}`)
    say(fixed, page.fixed)
    const mayChange = page.run !== null && shell.role() === 'engineer'
    change.node.hidden = suppression.hidden = !mayChange
    closed.hidden = mayChange
    say(
      closed,
      page.run === null
        ? 'No run of this skid is live: nothing can be changed here now. What the versions say stays as it was.'
        : 'An engineer changes settings.',
    )
    change.show(page)
    none.hidden = page.versions.length > 0
    table.hidden = compare.hidden = page.versions.length === 0
    compare.hidden = page.versions.length < 2
    fill(versions, ...page.versions.toReversed().map(rowOf))
    const options = () => page.versions.map((v) => el('option', { value: v.version, text: String(v.version) }))
    const [a, b] = picked ? [from.value, to.value] : ['', '']
    fill(from, ...options())
    fill(to, ...options())
    from.value = a === '' ? String(Math.max(1, page.versions.length - 1)) : a
    to.value = b === '' ? String(page.versions.length) : b
  }

  function rowOf(v: VersionRow): HTMLElement {
    const changes =
      v.kind === 'file' && v.changes.length === 0
        ? [el('li', { text: 'the whole skid file' })]
        : v.changes.slice(0, 12).map((c) => el('li', { text: changeText(c) }))
    if (v.changes.length > 12) changes.push(el('li', { text: `and ${v.changes.length - 12} more: compare the versions` }))
    return el(
      'tr',
      { 'data-version': v.version },
      el(
        'th',
        { scope: 'row' },
        String(v.version),
        v.planned ? el('p', {}, el('span', { class: 'tag', text: 'PLANNED' })) : null,
        v.planned && !change.node.hidden ? backButton(v) : null,
      ),
      el(
        'td',
        {},
        when(v.effectiveMs),
        v.effectiveMs > v.decidedMs ? el('p', { class: 'soft', text: `decided ${when(v.decidedMs)}` }) : null,
      ),
      el('td', {}, el('ul', {}, ...changes)),
      el('td', { text: v.reason }),
      el('td', { text: v.kind === 'file' ? 'the file' : v.person }),
    )
  }

  /** A planned change is undone by another at the same moment: both stand in the record, nothing comes of them. */
  function backButton(v: VersionRow): HTMLElement {
    const why = el('input', { type: 'text', id: 'back-reason', maxlength: 500, autocomplete: 'off' })
    const undo = (): SettingsSent => ({
      reason: why.value,
      effectiveMs: v.effectiveMs,
      changes: v.changes.map((c) => ({ path: c.path, new: c.old })),
    })
    const ask = () =>
      openForm(
        `Take back version ${v.version}`,
        'Take back',
        [el('p', { text: v.changes.map(changeText).join('; ') }), el('label', { for: 'back-reason', text: 'Why' }), why],
        async () => {
          await postJson(base, undo())
          await load()
          return ''
        },
      )
    return el('button', {
      type: 'button',
      class: 'small',
      text: 'Take back',
      'aria-label': `Take back version ${v.version}`,
      on: { click: ask },
    })
  }

  async function show(a: number, b: number): Promise<void> {
    try {
      const c = await getJson<SettingsComparison>(`${base}/compare?from=${a}&to=${b}`)
      fill(compared, ...comparedView(c))
      compared.dataset['changes'] = String(c.changes.length)
    } catch (error) {
      fill(compared, el('p', { class: 'refused', text: said(error) }))
    }
  }

  void load()
  return { node, title: `Settings of ${detail.skid}`, stop: () => undefined }
}

function comparedView(c: SettingsComparison): HTMLElement[] {
  const list = (names: readonly string[], word: string) =>
    names.length === 0 ? [] : [el('p', { text: `${word}: ${names.join(', ')}` })]
  const head = el('h3', { text: `Version ${c.from} to ${c.to}` })
  if (c.changes.length === 0) return [head, el('p', { class: 'hush', text: 'They say the same.' })]
  const row = (r: SettingRow) =>
    el(
      'tr',
      {},
      el('th', { scope: 'row', title: r.path, text: pathText(r.path) }),
      el('td', { text: settingText(r.old, r.unit) }),
      el('td', {}, el('b', { text: settingText(r.new, r.unit) })),
    )
  return [
    head,
    ...list(c.added, 'Added'),
    ...list(c.removed, 'Removed'),
    el(
      'div',
      { class: 'wide', tabindex: 0, role: 'region', 'aria-label': 'Differences' },
      el(
        'table',
        { class: 'runs' },
        el(
          'thead',
          {},
          el('tr', {}, ...['Setting', `Version ${c.from}`, `Version ${c.to}`].map((h) => el('th', { scope: 'col', text: h }))),
        ),
        el('tbody', {}, ...c.changes.map(row)),
      ),
    ),
  ]
}
