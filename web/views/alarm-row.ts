import type { ActBody, AlarmRow } from '../../server/wire/index.ts'
import { said } from '../api.ts'
import type { ZoneClock } from '../model/clock.ts'
import { duration, figure } from '../model/format.ts'
import { onScreen } from '../model/on-screen.ts'
import { causeWords, kindWords } from '../model/words.ts'
import { asideForm, backForm, resetForm } from './alarm-forms.ts'
import { alarmHelp } from './alarm-help.ts'
import { uncovered } from './covered.ts'
import { el, fill, say } from './dom.ts'
import { lookOf, markView, stateWord } from './mark.ts'

export interface AlarmHooks {
  /** Null in a replay: nothing can be done there. Resolves to a refusal with its mend, '' when done. */
  readonly act: ((body: ActBodyOf) => Promise<string>) | null
  readonly trend: (alarm: AlarmRow) => void
  /** What led to it. */
  readonly before: (alarm: AlarmRow) => void
}
/** An act without its person, who is added where it is sent. */
export type ActBodyOf = ActBody extends infer A ? (A extends unknown ? Omit<A, 'person'> : never) : never

/** Whether a row can be read as a whole right now: only then may it be acknowledged (ALM-07). */
const isSeen = (node: Element): boolean => onScreen(node.getBoundingClientRect(), ...uncovered(node))

/** One alarm: mark, state, what and when, one button for what it waits for, and below it the ways on from it. */
export function rowView(first: AlarmRow, clock: ZoneClock, hooks: AlarmHooks) {
  let alarm = first
  const mark = el('div', { class: 'm' })
  const state = el('p', { class: 'st' })
  const title = el('p', { class: 't' })
  const when = el('span')
  const firstTag = el('span', { class: 'tag inv', text: 'FIRST', hidden: true })
  const topTag = el('span', { class: 'tag inv', text: 'MOST URGENT', hidden: true })
  const refused = el('p', { class: 'refused', role: 'alert', hidden: true })
  const refuse = (text: string): void => {
    refused.hidden = text === ''
    say(refused, text)
  }
  async function send(body: ActBodyOf): Promise<string> {
    if (hooks.act === null) return ''
    try {
      return await hooks.act(body)
    } catch (error) {
      return `not done: ${said(error)}`
    }
  }
  async function acknowledge(): Promise<void> {
    if (ack.hidden || ack.getAttribute('aria-disabled') === 'true') return
    if (!isSeen(head)) return refuse('not acknowledged: the row is not on screen – scroll until all of it is seen')
    ack.setAttribute('aria-disabled', 'true')
    const hadFocus = document.activeElement === ack
    const refusal = await send({ kind: 'acknowledge', alarm: alarm.id })
    ack.removeAttribute('aria-disabled')
    refuse(refusal)
    if (refusal === '' && hadFocus) help.focus()
  }
  const ack = el('button', { type: 'button', class: 'ack', text: 'Acknowledge', on: { click: () => void acknowledge() } })
  const reset = el('button', { type: 'button', text: 'Reset', on: { click: () => resetForm(alarm, titleOf(alarm), send) } })
  const back = el('button', { type: 'button', text: 'Unshelve', on: { click: () => backForm(alarm, titleOf(alarm), send) } })
  const small = (text: string, run: () => void) => el('button', { type: 'button', class: 'small', text, on: { click: run } })
  const help = small('Help', () => {
    details.hidden = !details.hidden
    help.setAttribute('aria-expanded', String(!details.hidden))
    node.classList.toggle('open', !details.hidden)
    if (!details.hidden) draw()
  })
  help.classList.add('help')
  help.setAttribute('aria-expanded', 'false')
  const trend = small('Trend', () => hooks.trend(alarm))
  const before = small('Before', () => hooks.before(alarm))
  const aside = small('Put aside', () => asideForm(alarm, titleOf(alarm), send))
  const details = el('div', { class: 'details', hidden: true })
  const ways = el('div', { class: 'ways row' }, help, trend, before, hooks.act === null ? null : aside)
  const head = el(
    'div',
    { class: 'al-head' },
    el('div', { class: 'mk' }, mark, state),
    el('div', { class: 'tx' }, title, el('p', { class: 'w' }, firstTag, ' ', topTag, ' ', when)),
    el('div', { class: 'bt' }, ...(hooks.act === null ? [] : [ack, reset, back])),
    ways,
  )
  const node = el('li', {}, head, refused, details)
  const keys: Record<string, () => void> = {
    a: () => void acknowledge(),
    h: () => help.click(),
    t: () => trend.click(),
    b: () => before.click(),
    p: () => {
      if (!aside.hidden && hooks.act !== null) aside.click()
    },
  }
  // Keys work while a button of the row has the focus, and nowhere else.
  node.addEventListener('keydown', (event) => {
    if (!(event.target instanceof HTMLButtonElement) || event.ctrlKey || event.metaKey || event.altKey) return
    const run = keys[event.key]
    if (run === undefined) return
    event.preventDefault()
    run()
  })

  function draw(): void {
    fill(details, alarmHelp(alarm, clock), hooks.act === null ? null : commentForm())
  }

  function commentForm(): HTMLElement {
    const text = el('input', { type: 'text', maxlength: 500, 'aria-label': `Comment on alarm ${alarm.id}` })
    const save = el('button', { type: 'submit', class: 'small', text: 'Add comment' })
    const form = el('form', { class: 'row comment' }, text, save)
    form.addEventListener('submit', (event) => {
      event.preventDefault()
      if (text.value.trim() === '') return
      void send({ kind: 'comment', alarm: alarm.id, text: text.value.trim() }).then((refusal) => {
        refuse(refusal)
        if (refusal !== '') return
        text.value = ''
        text.placeholder = 'kept in the record'
      })
    })
    return form
  }

  let key = ''
  return {
    node,
    needsAck: () => alarm.needsAck && !ack.hidden,
    isSeen: () => isSeen(head),
    acknowledge,
    show(a: AlarmRow, nowMs: number, pin: { first: boolean; top: boolean }): void {
      alarm = a
      firstTag.hidden = !pin.first
      topTag.hidden = !pin.top
      const k = `${a.state} ${a.active} ${a.needsAck} ${a.priority}`
      if (k !== key) {
        key = k
        fill(mark, markView(a.priority, lookOf(a.state)))
        say(state, stateWord[a.state])
        state.classList.toggle('strong', a.needsAck)
        ack.hidden = !a.needsAck
        reset.hidden = a.state !== 'LACKED'
        back.hidden = a.state !== 'SHELVED' && a.state !== 'OOS'
        say(back, a.state === 'OOS' ? 'Into service' : 'Unshelve')
        aside.hidden = a.state === 'NORM' || a.state === 'OOS'
        // Put out of service before it was ever raised: nothing led to it.
        before.hidden = a.id < 0
        say(aside, a.state === 'SHELVED' ? 'Extend' : 'Put aside')
        node.dataset['state'] = a.state
        node.dataset['alarm'] = String(a.id)
        node.dataset['kind'] = a.kind
        for (const [button, word] of [
          [ack, 'Acknowledge'],
          [reset, 'Reset'],
          [back, back.textContent],
          [help, 'Help on'],
          [trend, 'Trend of'],
          [before, 'Before, what led to'],
          [aside, aside.textContent],
        ] as const)
          button.setAttribute('aria-label', `${word} ${titleOf(a)}`)
        if (!details.hidden) draw()
      }
      say(title, titleOf(a))
      const value =
        a.value === null
          ? ''
          : ` · ${figure(a.value, a.unit)}${a.limit === null || a.kind === 'fouling' ? '' : `, limit ${figure(a.limit, a.unit)}`}`
      const until = a.clearedMs === null ? '' : ` to ${clock.hms(a.clearedMs)}`
      const shelf = a.shelvedUntilMs === null ? '' : ` · ${duration(a.shelvedUntilMs - nowMs)} left`
      const why = a.aside === null ? '' : ` · ${a.aside.reason ?? a.aside.logic ?? 'no reason kept'}`
      say(when, `${clock.hms(a.raisedMs)}${until}${value}${shelf}${why}${a.badInput ? ' · its reading is bad' : ''}`)
    },
    /** No longer in the list, but somebody points at it: it keeps its place until let go. */
    gone(): void {
      for (const b of [ack, reset, back, aside]) b.hidden = true
      say(state, 'OVER')
    },
  }
}

export const titleOf = (a: AlarmRow): string =>
  `${a.tag !== null && (a.kind === 'sensor' || a.segment === null) ? a.tag : (a.segment ?? 'Skid')} ${kindWords[a.kind]}${a.cause === null || a.kind === 'sensor' ? '' : `: ${causeWords[a.cause]}`}`
