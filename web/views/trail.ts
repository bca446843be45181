import type { RunDetail, Trail, TrailRow } from '../../server/wire/index.ts'
import { getJson, postJson, said } from '../api.ts'
import { fromLocal, toLocal } from '../model/alarm-figures.ts'
import { zoneClock } from '../model/clock.ts'
import { changeText, summaryText, trailGroups, trailQuery, whatText } from '../model/trail.ts'
import { el, fill, say } from './dom.ts'
import { fieldOf, formOf } from './form.ts'
import type { Shell } from './watch.ts'

const limit = 100

/** Who did what, when and why, on a run or on the site; a reviewer marks how far it was looked through. */
export function trailView(detail: RunDetail, shell: Shell) {
  const clock = zoneClock(detail.skidFacts.timeZone)
  const groups = new Set(trailGroups.filter((g) => g.on).map((g) => g.group))
  let from = 0
  let shown: Trail | null = null
  let asked: AbortController | null = null

  const again = () => {
    from = 0
    void load()
  }
  const of = el(
    'select',
    { id: 'trail-of', on: { change: again } },
    el('option', { value: 'run', text: `run ${detail.run}: ${detail.title}` }),
    el('option', { value: 'site', text: 'the site: people, settings, runs, keys' }),
  )
  const person = el('select', { id: 'trail-person', on: { change: again } }, el('option', { value: '', text: 'anybody' }))
  const onlyNew = el('input', { type: 'checkbox', id: 'trail-new', on: { change: again } })
  const bound = (id: string) => el('input', { type: 'text', id, autocomplete: 'off', placeholder: 'any', on: { change: again } })
  const since = bound('trail-since')
  const until = bound('trail-until')
  const boxes = trailGroups.map(({ group, label, on }) => {
    const box = el('input', { type: 'checkbox', checked: on })
    box.addEventListener('change', () => {
      if (box.checked) groups.add(group)
      else groups.delete(group)
      again()
    })
    return el('label', { class: 'box' }, box, ` ${label}`)
  })
  const summary = el('p', { role: 'status' })
  const rows = el('tbody')
  const heads = ['No.', `Time, ${detail.skidFacts.timeZone}`, 'Recorded', 'Who', 'What', 'Of', 'Old → new', 'Reason']
  const table = el(
    'table',
    { class: 'runs trail' },
    el('caption', { class: 'vh', text: 'Audit trail, oldest first' }),
    el('thead', {}, el('tr', {}, ...heads.map((h) => el('th', { scope: 'col', text: h })))),
    rows,
  )
  const turn = (text: string, by: number) =>
    el('button', {
      type: 'button',
      class: 'small',
      text,
      on: {
        click: () => {
          from = Math.max(0, from + by)
          void load()
        },
      },
    })
  const earlier = turn('Earlier', -limit)
  const later = turn('Later', limit)
  const proof = el('div', { class: 'soft stack' })
  const remark = el('input', { type: 'text', id: 'remark', maxlength: 2000, autocomplete: 'off' })
  const covers = el('p', { class: 'soft' })
  const form = formOf(
    { id: 'review', title: 'Review', send: 'Mark as reviewed' },
    async () => {
      if (!shell.needPerson()) return 'Not done: sign in first'
      if (shown === null) return 'Not done: nothing is shown yet'
      const sent = { run: shown.run, counts: shown.counts, remark: remark.value }
      await postJson<Trail>('/api/trail/reviews', sent)
      remark.value = ''
      await load()
      return 'Marked. The review is itself a record.'
    },
    covers,
    fieldOf('Remark', remark, 'What was found, or nothing.'),
  )
  const notReviewer = el('p', { class: 'soft', text: 'A person of the role reviewer marks the trail as reviewed.' })

  const node = el(
    'main',
    { id: 'main', class: 'list desk settings', tabindex: -1 },
    el('h1', { text: 'Audit trail' }),
    el(
      'div',
      { class: 'sheet trail-filter', role: 'group', 'aria-label': 'What is shown' },
      fieldOf('Trail of', of),
      fieldOf('By', person),
      fieldOf('Recorded from', since, `such as ${toLocal(Date.now(), clock.offsetMs)}`),
      fieldOf('to', until),
      el(
        'div',
        { class: 'kinds', role: 'group', 'aria-label': 'Kinds' },
        ...boxes,
        el('label', { class: 'box' }, onlyNew, ' Only what is new'),
      ),
    ),
    summary,
    el('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': 'Records' }, table),
    el('div', { class: 'row' }, earlier, later),
    el(
      'div',
      { class: 'pair' },
      el('div', {}, form, notReviewer),
      el('section', { class: 'stack', 'aria-label': 'Proof' }, el('h2', { text: 'Proof' }), proof),
    ),
  )
  node.dataset['page'] = 'trail'

  const time = (tMs: number | null): string => (tMs === null ? '' : clock.full(tMs))
  const instant = (text: string): number | null => (text.trim() === '' ? null : fromLocal(text.trim(), clock.offsetMs))

  function rowOf(r: TrailRow): HTMLElement {
    return el(
      'tr',
      { class: r.isNew ? 'fresh' : '', 'data-group': r.group, 'data-what': r.what },
      el(
        'th',
        { scope: 'row', class: 'nowrap' },
        `${r.chain === 'site' ? 'site ' : ''}${r.n}`,
        r.isNew ? el('strong', { text: ' new' }) : null,
      ),
      el('td', { class: 'nowrap', text: time(r.tMs) }),
      el('td', { class: 'nowrap', text: time(r.recordedMs) }),
      el('td', { text: r.person ?? '' }),
      el('td', { text: r.group === 'refused' ? `${whatText(r)}: refused` : whatText(r) }),
      el('td', { class: 'long', text: r.about ?? '' }),
      el('td', { class: 'long', text: changeText(r) }),
      el('td', { class: 'long', text: r.reason ?? '' }),
    )
  }

  async function load(): Promise<void> {
    asked?.abort()
    asked = new AbortController()
    const wrong = [since, until].find((input) => input.value.trim() !== '' && instant(input.value) === null)
    if (wrong !== undefined) {
      say(summary, `“${wrong.value}” is no time of the kind 2031-01-14 03:12`)
      return
    }
    try {
      const query = trailQuery({
        groups, person: person.value, onlyNew: onlyNew.checked, fromMs: instant(since.value), toMs: instant(until.value), from, limit,
      }) // biome-ignore format: a list
      const url = of.value === 'site' ? '/api/trail' : `/api/runs/${detail.run}/trail`
      show(await getJson<Trail>(`${url}?${query}`, asked.signal))
    } catch (error) {
      if (!(error instanceof DOMException)) say(summary, said(error))
    }
  }

  function show(t: Trail): void {
    shown = t
    fill(rows, ...t.rows.map(rowOf))
    table.hidden = t.rows.length === 0
    say(summary, summaryText(t, clock))
    const chosen = person.value
    fill(
      person,
      el('option', { value: '', text: 'anybody' }),
      ...t.people.map((name) => el('option', { value: name, text: name, selected: name === chosen })),
    )
    earlier.disabled = t.from === 0
    later.disabled = t.from + t.rows.length >= t.total
    const isReviewer = shell.role() === 'reviewer'
    form.hidden = !isReviewer
    notReviewer.hidden = isReviewer
    say(
      covers,
      `It covers everything recorded so far, shown or filtered away: ${t.run === null ? '' : `${t.counts.run} records of the run and `}${t.counts.site} of the site.`,
    )
    const { fingerprint, trouble } = t.signing
    fill(
      proof,
      el('p', {
        text: `${t.run === null ? 'The chain of the site' : `The chain of run ${t.run}`} has ${t.run === null ? t.counts.site : t.counts.run} records. Its head, to be kept with a printed report:`,
      }),
      el('p', {}, el('code', { class: 'hash', text: t.head })),
      el('p', {
        text:
          fingerprint === null
            ? 'Its heads are not signed.'
            : `Heads are signed each minute by the key with the fingerprint ${fingerprint}.`,
      }),
      trouble === null ? null : el('p', { class: 'refused', text: trouble }),
      el(
        'p',
        {},
        'Whether anything was changed since is told by ',
        el('code', { text: 'npx clearbore verify' }),
        '. It is tamper-evident: it shows a change, it does not prevent one.',
      ),
    )
    node.dataset['rows'] = String(t.rows.length)
    node.dataset['ready'] = 'true'
  }
  void load()

  return { node, title: `Audit trail ${detail.skid}`, stop: () => asked?.abort() }
}
