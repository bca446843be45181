import type { AlarmRow, LiveState } from '../../server/wire/index.ts'
import { orderOf, pinnedOf } from '../model/alarm-list.ts'
import type { ZoneClock } from '../model/clock.ts'
import { type AlarmHooks, rowView } from './alarm-row.ts'
import { watchCovered } from './covered.ts'
import { count, el, say } from './dom.ts'

export type { ActBodyOf } from './alarm-row.ts'

/** The alarms in order of arrival, newest on top. While somebody points at the list or is inside it, no row moves. */
export function alarmsView(clock: ZoneClock, hooks: AlarmHooks) {
  const head = el('h2', { id: 'alarms-title', text: 'Alarms' })
  const note = el('p', { class: 'soft' })
  const ackSeen = el('button', { type: 'button', class: 'small', id: 'ack-seen', hidden: true })
  const list = el('ul', { class: 'alarms' })
  const empty = el('p', { class: 'hush' })
  const more = el('p', { class: 'row to-pages' })
  watchCovered()
  const node = el(
    'section',
    { class: 'al', 'aria-labelledby': 'alarms-title' },
    el('div', { class: 'head' }, head, note, hooks.act === null ? null : ackSeen),
    empty,
    list,
    more,
  )
  const rows = new Map<number, ReturnType<typeof rowView>>()
  let shown: number[] = []
  let pins: { first: number; top: number | null } | null = null
  let pointed = false
  node.addEventListener('pointerenter', () => {
    pointed = true
  })
  node.addEventListener('pointerleave', () => {
    pointed = false
  })
  const held = () => pointed || list.contains(document.activeElement)

  /** Up and down go to the same button of the next row. */
  list.addEventListener('keydown', (event) => {
    const step = event.key === 'ArrowDown' ? 1 : event.key === 'ArrowUp' ? -1 : 0
    if (step === 0 || !(event.target instanceof HTMLButtonElement)) return
    const at = [...list.children].findIndex((li) => li.contains(event.target as Node))
    const next = list.children[at + step]
    if (next === undefined) return
    event.preventDefault()
    next.querySelector<HTMLElement>('.ack:not([hidden])')?.focus()
    if (!next.contains(document.activeElement)) next.querySelector<HTMLElement>('.help')?.focus()
  })

  const seen = () => shown.flatMap((id) => rows.get(id) ?? []).filter((r) => r.needsAck() && r.isSeen())
  ackSeen.addEventListener('click', async () => {
    for (const row of seen()) await row.acknowledge()
    drawSeen()
  })
  let asked = 0
  /** Measuring rows costs a layout: once a frame, and only where more than one waits. */
  function drawSeen(): void {
    asked ||= requestAnimationFrame(() => {
      asked = 0
      const waits = [...rows.values()].filter((r) => r.needsAck()).length
      const n = waits < 2 ? 0 : seen().length
      ackSeen.hidden = n < 2
      say(ackSeen, `Acknowledge the ${n} on screen`)
    })
  }
  window.addEventListener('scroll', drawSeen, { passive: true })

  return {
    node,
    more,
    show(alarms: readonly AlarmRow[], nowMs: number, flood: LiveState['flood'], quietText: string): void {
      const all = flood === null || alarms.some((a) => a.id === flood.first.id) ? alarms : [flood.first, ...alarms]
      // The pins of a flood are set and taken off only while nobody is at the list; those set stay labelled.
      if (!held() || pins === null) pins = pinnedOf(all, flood)
      const pinned =
        pins === null
          ? []
          : [...new Set([pins.first, ...(pins.top === null ? [] : [pins.top])])].filter((id) => all.some((a) => a.id === id))
      const order = orderOf(all, shown, held(), pinned)
      const byId = new Map(all.map((a) => [a.id, a]))
      for (const id of order) {
        const a = byId.get(id)
        let row = rows.get(id)
        if (row === undefined && a !== undefined) {
          row = rowView(a, clock, hooks)
          rows.set(id, row)
        }
        if (a === undefined) row?.gone()
        else row?.show(a, nowMs, { first: id === pins?.first, top: id === pins?.top })
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
      let top = pinned.length === 0 ? 0 : (document.querySelector<HTMLElement>('.person > .answer')?.offsetHeight ?? 0)
      for (const [i, id] of order.entries()) {
        const li = rows.get(id)!.node
        const isPinned = i < pinned.length && pinned.includes(id)
        li.classList.toggle('pinned', isPinned)
        if (isPinned) {
          li.style.setProperty('--above', `${top}px`)
          top += li.offsetHeight
        }
      }
      const unack = alarms.filter((a) => a.needsAck).length
      const aside = alarms.filter((a) => a.state === 'SHELVED')
      say(head, flood === null ? 'Alarms' : `Flood: ${count(flood.count, 'alarm')} since ${clock.hm(flood.first.raisedMs)}`)
      say(
        note,
        [
          flood === null ? null : 'first and most urgent pinned',
          unack > 0 ? `${unack} not acknowledged` : null,
          aside.length > 0 ? `${aside.length} shelved` : null,
        ]
          .filter((t) => t !== null)
          .join(', '),
      )
      drawSeen()
      empty.hidden = alarms.length > 0
      say(empty, quietText)
      node.dataset['count'] = String(alarms.length)
      node.dataset['unack'] = String(unack)
      node.dataset['flood'] = String(flood !== null)
    },
    stop(): void {
      window.removeEventListener('scroll', drawSeen)
      cancelAnimationFrame(asked)
    },
  }
}
