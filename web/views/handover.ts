import type { AdviceState, AlarmRow, HandOver, RunDetail, StoryLine } from '../../server/wire/index.ts'
import { getJson, postJson, said } from '../api.ts'
import { zoneClock } from '../model/clock.ts'
import { duration, figure, fixed } from '../model/format.ts'
import { adviceInForce } from '../model/in-force.ts'
import { actionWords, inPlantTime } from '../model/words.ts'
import { titleOf } from './alarm-row.ts'
import { count, el, fill } from './dom.ts'
import { stateWord } from './mark.ts'
import { type Period, periodView } from './period.ts'
import type { Shell } from './watch.ts'

const noteMark = 'Hand-over: '

/** The note at a change of shift, on one page to be read, printed and signed; all but the free text comes from the run. */
export function handOverView(detail: RunDetail, shell: Pick<Shell, 'needPerson' | 'announce'>) {
  const clock = zoneClock(detail.skidFacts.timeZone)
  const span: Period = { fromMs: detail.fromMs ?? 0, toMs: Math.max(detail.clock?.nowMs ?? 0, detail.toMs ?? 0) }
  const isLive = detail.state === 'live'
  const sheet = el('div', { class: 'sheet-note' })
  let shown: Period | null = null
  let asked: AbortController | null = null
  const period = periodView(span, clock, detail.skidFacts.timeZone, ['8h', '12h', '24h', 'all'], '12h', (p) => {
    shown = p
    void load()
  })
  const words = el('textarea', { id: 'note-words', rows: 3, maxlength: 1900 })
  const says = el('p', { class: 'refused', role: 'alert', hidden: true })
  const save = el('button', { type: 'submit', class: 'solid', text: 'Add to the note' })
  const form = el(
    'form',
    { class: 'ask no-print' },
    el('label', { for: 'note-words', text: 'What the next one must know' }),
    words,
    says,
    el('div', { class: 'row' }, save, el('button', { type: 'button', text: 'Print', on: { click: () => window.print() } })),
  )
  form.addEventListener('submit', async (event) => {
    event.preventDefault()
    const text = words.value.trim()
    const refuse = (t: string): void => {
      says.hidden = t === ''
      says.textContent = t
    }
    if (text === '') return refuse('refused: nothing is written – say what the next one must know')
    if (!shell.needPerson()) return refuse('say who you are first: your name is asked for in the top strip')
    try {
      await postJson(`/api/runs/${detail.run}/acts`, { kind: 'comment', alarm: null, text: noteMark + text })
      refuse('')
      words.value = ''
      shell.announce('added to the note and kept in the record')
      // The note ends with what was just written.
      if (shown !== null) shown = { fromMs: shown.fromMs, toMs: Number.POSITIVE_INFINITY }
      await load()
    } catch (error) {
      refuse(`not done: ${said(error)}`)
    }
  })
  const node = el(
    'main',
    { id: 'main', class: 'list desk handover', tabindex: -1 },
    el('h1', { text: `Hand-over, skid ${detail.skid}` }),
    period.node,
    isLive
      ? form
      : el(
          'div',
          { class: 'row no-print' },
          el('p', { class: 'soft', text: 'This run is over: nothing can be added.' }),
          el('button', { type: 'button', text: 'Print', on: { click: () => window.print() } }),
        ),
    sheet,
  )
  node.dataset['page'] = 'handover'

  async function load(): Promise<void> {
    if (shown === null) return
    asked?.abort()
    asked = new AbortController()
    const query = new URLSearchParams({ fromMs: String(Math.round(shown.fromMs)) })
    if (Number.isFinite(shown.toMs)) query.set('toMs', String(Math.round(shown.toMs)))
    try {
      const h = await getJson<HandOver>(`/api/runs/${detail.run}/hand-over?${query}`, asked.signal)
      fill(sheet, ...sections(h))
      node.dataset['ready'] = `${h.fromMs} ${h.toMs} ${h.comments.length}`
    } catch (error) {
      if (!(error instanceof DOMException)) fill(sheet, el('p', { role: 'alert', class: 'refused', text: said(error) }))
    }
  }

  function sections(h: HandOver): HTMLElement[] {
    const at = (tMs: number): string =>
      clock.day(tMs) === clock.day(h.toMs) ? clock.hm(tMs) : `${clock.day(tMs)} ${clock.hm(tMs)}`
    const words = (text: string): string => inPlantTime(text, clock, h.toMs)
    const part = (title: string, none: string, items: readonly (string | HTMLElement)[]) =>
      el(
        'section',
        {},
        el('h2', { text: title }),
        items.length === 0
          ? el('p', { class: 'soft', text: none })
          : el('ul', {}, ...items.map((i) => (typeof i === 'string' ? el('li', { text: i }) : el('li', {}, i)))),
      )
    const alarm = (a: AlarmRow): string => {
      const aside =
        a.aside === null ? '' : `, ${[a.aside.person ?? a.aside.logic, a.aside.reason].filter((t) => t !== null).join(': ')}`
      const until = a.shelvedUntilMs === null ? '' : `, until ${at(a.shelvedUntilMs)} (${duration(a.shelvedUntilMs - h.toMs)} left)`
      const owner = a.acknowledgedBy === null ? '' : `, acknowledged by ${a.acknowledgedBy}`
      const value = a.value === null ? '' : `, ${figure(a.value, a.unit)}`
      return `${a.priority.toUpperCase()} ${stateWord[a.state]}: ${titleOf(a)}, since ${at(a.raisedMs)}${value}${owner}${aside}${until}`
    }
    const line = (l: StoryLine): string =>
      `${at(l.tMs)} ${l.person ?? ''}: ${words(l.text.startsWith(noteMark) ? l.text.slice(noteMark.length) : l.text)}`
    const notes = h.comments.filter((c) => c.text.startsWith(noteMark))
    const { raised: r } = h
    // As on the watch page: what was advised against a condition that is gone stands no more.
    const alarms = [...h.open, ...h.shelved, ...h.suppressed, ...h.outOfService]
    const advice = h.advice.map((a) => ({
      ...a,
      at: new Date(a.atMs).toISOString(),
      action: a.action as AdviceState['action'],
      plan: null,
    }))
    const standing = adviceInForce({ alarms, advice }).map((a) => a.advice)
    return [
      el('p', { class: 'shift' }, el('b', { text: `${clock.full(h.fromMs)} to ${clock.full(h.toMs)} ${clock.offset(h.toMs)}` }), `, run ${h.run}, ${detail.title}. ${h.production ? 'In production' : 'Not in production'} at the end.`),
      el('p', { text: `${count(r.high + r.medium + r.low, 'alarm')} in the shift: ${r.high} high, ${r.medium} medium, ${r.low} low; ${r.over} of them over and acknowledged.` }),
      part('What the next one must know', 'Nothing written.', notes.map(line)),
      part('Open', 'No alarm stands.', h.open.map(alarm)),
      el('div', { class: 'two' },
        part('Shelved', 'None.', h.shelved.map(alarm)),
        part('Suppressed by stated logic', 'None.', h.suppressed.map(alarm)),
        part('Out of service', 'None.', h.outOfService.map(alarm)),
        part('Flush in course', 'None.', h.flush.map((f) => `${f.segment}: step ${f.step} ${f.state} at ${at(f.atMs)} by ${f.person}`)),
      ),
      part('Advice standing', 'None.', standing.map((a) => `${at(a.atMs)} ${actionWords[a.action]}${a.segments.length === 0 || a.reason.startsWith(a.segments[0]!) ? '' : `, ${a.segments.join(', ')}`}: ${words(a.reason)}`)),
      part('Resistance', 'No segment.', [h.segments.map((s) => `${s.segment} ${s.ratio === null ? 'not known' : `${fixed(s.ratio, 2)} × clean`}${s.limitFromMs === null || s.limitToMs === null ? '' : ` (limit ${at(s.limitFromMs)} to ${at(s.limitToMs)})`}`).join(' · ')]),
      el('div', { class: 'two' },
        part(`Data gaps, of ${fixed(h.gapStepMs / 1000, 0)} s and more`, 'None.', h.gaps.map((g) => `${at(g.fromMs)} to ${at(g.toMs)}, ${duration(g.toMs - g.fromMs)}`)),
        part('Readings bad now', 'None.', h.badTags.map((b) => `${b.tag}${b.reason === null ? '' : `, ${b.reason}`}`)),
        part('Settings changed in the shift', 'None.', h.changes.map(line)),
        part('Other comments', 'None.', h.comments.filter((c) => !c.text.startsWith(noteMark)).map(line)),
      ),
      el('p', { class: 'sign' }, el('span', { text: 'Handed over by' }), el('span', { text: 'Taken over by' })),
      el('p', { class: 'soft', text: 'Made by Clearbore from the run; advisory only. Site procedures and authorised people decide.' }),
    ] // biome-ignore format: a page
  }

  period.begin()
  return { node, title: `Hand-over ${detail.skid}`, stop: () => asked?.abort() }
}
