import type { AlarmRow } from '../../server/wire/index.ts'
import { asideReasons, reasonOf } from '../model/alarm-refusal.ts'
import type { ActBodyOf } from './alarm-row.ts'
import { openForm } from './dialog.ts'
import { el } from './dom.ts'

type Send = (body: ActBodyOf) => Promise<string>

const label = (text: string, field: HTMLElement): HTMLElement => el('label', { class: 'field' }, el('span', { text }), field)
function reasonFields() {
  const pick = el(
    'select',
    { id: 'ask-pick' },
    el('option', { value: '', text: 'in my own words' }),
    ...asideReasons.map((r) => el('option', { value: r, text: r })),
  )
  const words = el('input', { type: 'text', id: 'ask-words', maxlength: 300, autocomplete: 'off' })
  return { nodes: [label('Reason', pick), label('In words', words)], reason: () => reasonOf(pick.value, words.value) }
}
function wordsField(text: string) {
  const words = el('input', { type: 'text', id: 'ask-words', maxlength: 300, autocomplete: 'off' })
  return { node: label(text, words), words: () => words.value.trim() }
}

/** Shelve for a time, or out of service for maintenance: either with a reason (ALM-08, USR-05). */
export function asideForm(alarm: AlarmRow, name: string, send: Send): void {
  const most = alarm.shelveMaxMin
  const minutes = el('input', {
    type: 'number',
    id: 'ask-minutes',
    min: 1,
    max: most,
    step: 1,
    value: most === 0 ? 1 : Math.min(15, most),
  })
  const { nodes, reason } = reasonFields()
  const choice = (value: string, text: string, on: boolean) => {
    const input = el('input', { type: 'radio', name: 'how', value, checked: on, disabled: value === 'shelve' && most === 0 })
    input.addEventListener('change', draw)
    return { input, node: el('label', { class: 'choice' }, input, el('span', { text })) }
  }
  const shelve = choice(
    'shelve',
    most === 0 ? 'Shelve for a while: not for this class' : `Shelve for a while, at most ${most} min at once`,
    most > 0,
  )
  const service = choice('service', 'Out of service for maintenance, until put back', most === 0)
  const time = label('Minutes', minutes)
  function draw(): void {
    time.hidden = !shelve.input.checked
  }
  draw()
  const why =
    most === 0
      ? `${alarm.priority.toUpperCase()} alarms may not be shelved. Answer it, or take it out of service if its instrument is being worked on.`
      : 'Nobody is called while it is put aside; its condition is still followed and recorded. It stays in the list and in the counts.'
  openForm(
    `Put aside: ${name}`,
    'Put aside',
    [
      el('p', { text: why }),
      el('fieldset', {}, el('legend', { class: 'vh', text: 'How' }), shelve.node, service.node),
      time,
      ...nodes,
    ],
    () =>
      shelve.input.checked
        ? send({ kind: 'shelve', alarm: alarm.id, minutes: Number(minutes.value), reason: reason() })
        : send({ kind: 'out-of-service', key: alarm.key, reason: reason() }),
  )
}

/** Takes an alarm back: from the shelf or into service. */
export function backForm(alarm: AlarmRow, name: string, send: Send): void {
  const { node, words } = wordsField('Reason')
  const service = alarm.state === 'OOS'
  openForm(
    service ? `Back into service: ${name}` : `Unshelve: ${name}`,
    service ? 'Back into service' : 'Unshelve',
    [el('p', { text: 'If its condition is there it calls at once, and has to be acknowledged again.' }), node],
    () =>
      service
        ? send({ kind: 'in-service', key: alarm.key, reason: words() })
        : send({ kind: 'unshelve', alarm: alarm.id, reason: words() }),
  )
}

/** Resets a latched alarm whose condition is gone. */
export function resetForm(alarm: AlarmRow, name: string, send: Send): void {
  const { node, words } = wordsField('What was found and done')
  openForm(
    `Reset: ${name}`,
    'Reset',
    [el('p', { text: 'The condition is gone; the alarm is held until somebody has looked at why it came.' }), node],
    () => send({ kind: 'reset', alarm: alarm.id, reason: words() }),
  )
}
