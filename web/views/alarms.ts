import type { ActBody, AlarmRow } from '../../server/wire/index.ts'
import { said } from '../api.ts'
import { firstOut, inFlood, orderOf } from '../model/alarm-list.ts'
import type { ZoneClock } from '../model/clock.ts'
import { duration, figure } from '../model/format.ts'
import { causeWords, inPlantTime, kindWords } from '../model/words.ts'
import { count, el, fill, say } from './dom.ts'
import { lookOf, markView, stateWord } from './mark.ts'

export interface AlarmHooks {
  /** Null in a replay: nothing can be acknowledged there. */
  readonly act: ((body: ActBodyOf) => Promise<string>) | null
  readonly trend: (alarm: AlarmRow) => void
}
/** An act without its person, who is added where it is sent. */
export type ActBodyOf = ActBody extends infer A ? (A extends { person: string } ? Omit<A, 'person'> : never) : never

/** The alarms in order of arrival, newest on top. While somebody points at the list or is inside it, no row moves. */
export function alarmsView(clock: ZoneClock, hooks: AlarmHooks) {
  const head = el('h2', { id: 'alarms-title', text: 'Alarms' })
  const note = el('p', { class: 'soft' })
  const list = el('ul', { class: 'alarms' })
  const empty = el('p', { class: 'hush' })
  const node = el(
    'section',
    { class: 'al', 'aria-labelledby': 'alarms-title' },
    el('div', { class: 'head' }, head, note),
    empty,
    list,
  )
  const rows = new Map<number, ReturnType<typeof rowView>>()
  let shown: number[] = []
  let flood = false
  let pointed = false
  node.addEventListener('pointerenter', () => {
    pointed = true
  })
  node.addEventListener('pointerleave', () => {
    pointed = false
  })
  const held = () => pointed || list.contains(document.activeElement)

  return {
    node,
    show(alarms: readonly AlarmRow[], nowMs: number, quietText: string): void {
      flood = inFlood(alarms, nowMs, flood)
      const first = flood ? firstOut(alarms, nowMs) : null
      const order = orderOf(alarms, shown, held())
      if (first !== null) order.unshift(...order.splice(order.indexOf(first.id), 1))
      const byId = new Map(alarms.map((a) => [a.id, a]))
      for (const id of order) {
        const a = byId.get(id)
        let row = rows.get(id)
        if (row === undefined && a !== undefined) {
          row = rowView(a, clock, hooks)
          rows.set(id, row)
        }
        if (a === undefined) row?.gone()
        else row?.show(a, nowMs, a.id === first?.id)
      }
      if (order.length !== shown.length || order.some((id, i) => id !== shown[i])) {
        // Rows are moved one by one, and only those out of place, so that focus and open details stay.
        order.forEach((id, i) => {
          const want = rows.get(id)?.node
          if (want !== undefined && list.children[i] !== want) list.insertBefore(want, list.children[i] ?? null)
        })
        for (const id of shown)
          if (!order.includes(id)) {
            rows.get(id)?.node.remove()
            rows.delete(id)
          }
        shown = order
      }
      const unack = alarms.filter((a) => a.needsAck).length
      say(head, flood ? `Flood: ${count(alarms.filter((a) => nowMs - a.raisedMs < 600_000).length, 'alarm')} in 10 min` : 'Alarms')
      say(note, flood ? 'first one pinned on top' : unack > 0 ? `${unack} not acknowledged` : '')
      empty.hidden = alarms.length > 0
      say(empty, quietText)
      node.dataset['count'] = String(alarms.length)
      node.dataset['unack'] = String(unack)
      node.dataset['flood'] = String(flood)
    },
  }
}

function rowView(first: AlarmRow, clock: ZoneClock, hooks: AlarmHooks) {
  let alarm = first
  const mark = el('div', { class: 'm' })
  const state = el('p', { class: 'st' })
  const title = el('p', { class: 't' })
  const when = el('p', { class: 'w' })
  const pin = el('span', { class: 'tag inv', text: 'FIRST', hidden: true })
  const refused = el('p', { class: 'refused', role: 'alert', hidden: true })
  const send = (button: HTMLButtonElement, body: ActBodyOf, done: () => void) => {
    button.setAttribute('aria-disabled', 'true')
    hooks.act?.(body).then(
      (refusal) => {
        button.removeAttribute('aria-disabled')
        refused.hidden = refusal === ''
        say(refused, refusal)
        if (refusal === '') done()
      },
      (error: unknown) => {
        button.removeAttribute('aria-disabled')
        refused.hidden = false
        say(refused, `not done: ${said(error)}`)
      },
    )
  }
  const ack = el('button', {
    type: 'button',
    class: 'ack',
    text: 'Acknowledge',
    on: {
      click: () => {
        if (ack.getAttribute('aria-disabled') !== 'true') send(ack, { kind: 'acknowledge', alarm: alarm.id }, () => more.focus())
      },
    },
  })
  const more = el('button', { type: 'button', class: 'small help', text: 'Help', 'aria-expanded': 'false' })
  const details = el('div', { class: 'details', hidden: true })
  more.addEventListener('click', () => {
    details.hidden = !details.hidden
    more.setAttribute('aria-expanded', String(!details.hidden))
    if (!details.hidden) draw()
  })
  const node = el(
    'li',
    {},
    el('div', { class: 'mk' }, mark, state),
    el('div', { class: 'tx' }, title, el('p', { class: 'w' }, pin, ' ', when)),
    el('div', { class: 'bt' }, hooks.act === null ? null : ack, more),
    refused,
    details,
  )

  function draw(): void {
    const h = alarm.help
    const pairs: [string, string][] = [['Message', inPlantTime(alarm.message, clock, alarm.raisedMs)]]
    if (h !== null)
      pairs.push(
        ['Check', h.check],
        ['Action', h.action],
        ['If not', h.consequence],
        ['Causes', h.causes],
        ['Time', `${duration(h.timeToRespondS * 1000)} to respond`],
      )
    if (alarm.evidence.for.length > 0) pairs.push(['Speaks for', inPlantTime(alarm.evidence.for.join('; '), clock, alarm.raisedMs)])
    if (alarm.evidence.against.length > 0)
      pairs.push(['Against', inPlantTime(alarm.evidence.against.join('; '), clock, alarm.raisedMs)])
    if (alarm.evidence.notExcluded.length > 0)
      pairs.push(['Not ruled out', inPlantTime(alarm.evidence.notExcluded.join('; '), clock, alarm.raisedMs)])
    if (alarm.onset !== null)
      pairs.push([
        'Began',
        `${clock.hm(Date.parse(alarm.onset.at))}, between ${clock.hm(Date.parse(alarm.onset.low))} and ${clock.hm(Date.parse(alarm.onset.high))} (${Math.round(100 * alarm.onset.level)} %)`,
      ])
    if (alarm.acknowledgedMs !== null)
      pairs.push(['Owned by', `${alarm.acknowledgedBy ?? 'not known'} since ${clock.hms(alarm.acknowledgedMs)}`])
    pairs.push(['Found by', alarm.detector], ['Number', String(alarm.id)])
    const list = el('dl', { class: 'advice' })
    for (const [k, v] of pairs) list.append(el('dt', { text: k }), el('dd', { text: v }))
    const trend = el('button', { type: 'button', class: 'small', text: 'Show its trend', on: { click: () => hooks.trend(alarm) } })
    fill(details, list, el('div', { class: 'row' }, trend), hooks.act === null ? null : commentForm())
  }

  function commentForm(): HTMLElement {
    const text = el('input', { type: 'text', maxlength: 500, 'aria-label': `Comment on alarm ${alarm.id}` })
    const save = el('button', { type: 'submit', class: 'small', text: 'Add comment' })
    const form = el('form', { class: 'row comment' }, text, save)
    form.addEventListener('submit', (event) => {
      event.preventDefault()
      if (text.value.trim() !== '')
        send(save, { kind: 'comment', alarm: alarm.id, text: text.value.trim() }, () => {
          text.value = ''
          text.placeholder = 'kept in the record'
        })
    })
    return form
  }

  let key = ''
  return {
    node,
    show(a: AlarmRow, nowMs: number, pinned: boolean): void {
      alarm = a
      pin.hidden = !pinned
      const k = `${a.state} ${a.active} ${a.needsAck} ${a.priority}`
      if (k !== key) {
        key = k
        fill(mark, markView(a.priority, lookOf(a.state)))
        say(state, stateWord[a.state])
        state.classList.toggle('strong', a.needsAck)
        ack.hidden = hooks.act === null || !a.needsAck
        node.dataset['state'] = a.state
        node.dataset['alarm'] = String(a.id)
        node.dataset['kind'] = a.kind
        ack.setAttribute('aria-label', `Acknowledge ${titleOf(a)}`)
        more.setAttribute('aria-label', `Help on ${titleOf(a)}`)
        if (!details.hidden) draw()
      }
      say(title, titleOf(a))
      const value =
        a.value === null
          ? ''
          : ` · ${figure(a.value, a.unit)}${a.limit === null || a.kind === 'fouling' ? '' : `, limit ${figure(a.limit, a.unit)}`}`
      const until = a.clearedMs === null ? '' : ` to ${clock.hms(a.clearedMs)}`
      const shelf = a.shelvedUntilMs === null ? '' : ` · shelved, ${duration(a.shelvedUntilMs - nowMs)} left`
      say(when, `${clock.hms(a.raisedMs)}${until}${value}${shelf}${a.badInput ? ' · its reading is bad' : ''}`)
    },
    /** No longer in the list, but somebody points at it: it keeps its place until let go. */
    gone(): void {
      ack.hidden = true
      say(state, 'OVER')
    },
  }
}

export const titleOf = (a: AlarmRow): string =>
  `${a.tag !== null && (a.kind === 'sensor' || a.segment === null) ? a.tag : (a.segment ?? 'Skid')} ${kindWords[a.kind]}${a.cause === null || a.kind === 'sensor' ? '' : `: ${causeWords[a.cause]}`}`
