import type { RunDetail, SettingsSent } from '../../server/wire/index.ts'
import { postJson } from '../api.ts'
import { el } from './dom.ts'
import { fieldOf, formOf } from './form.ts'

const phases = ['startup', 'production', 'flush', 'hold', 'shutdown']

/** Suppression by design: a named logic, these alarms while the log's phase is one of these (ALM-09). */
export function suppressionForm(detail: RunDetail, url: string, done: () => void): HTMLElement {
  const name = el('input', { type: 'text', id: 'logic', maxlength: 64, autocomplete: 'off', spellcheck: 'false' })
  const alarms = el('input', { type: 'text', id: 'logic-alarms', maxlength: 500, autocomplete: 'off', spellcheck: 'false' })
  const reason = el('input', { type: 'text', id: 'logic-reason', maxlength: 500, autocomplete: 'off' })
  const boxes = phases.map((p) => ({ p, box: el('input', { type: 'checkbox', id: `phase-${p}` }) }))
  const [first] = detail.skidFacts.segments
  const form = formOf(
    { id: 'suppress', title: 'Suppress alarms by a stated logic', send: 'Put into force' },
    async () => {
      const on = boxes.filter(({ box }) => box.checked).map(({ p }) => p)
      const keys = alarms.value.split(/[,\s]+/).filter((x) => x !== '')
      const off = keys.length === 0 && on.length === 0
      const sent: SettingsSent = {
        reason: reason.value,
        effectiveMs: null,
        changes: [
          { path: `suppression.${name.value.trim()}.alarms`, new: off ? null : keys },
          { path: `suppression.${name.value.trim()}.phases`, new: off ? null : on },
        ],
      }
      await postJson(url, sent)
      form.reset()
      done()
      return off
        ? 'Done: this logic suppresses nothing any more.'
        : 'Done. A suppressed alarm is recorded with the name of its logic.'
    },
    fieldOf('Its name', name, 'Letters, digits and hyphens, such as low-flow-in-shutdown.'),
    fieldOf(
      'Alarms',
      alarms,
      `Kinds, or kind:segment, such as dp-limit:${first?.id ?? 'R1'}. None with no phase takes the logic away.`,
    ),
    el(
      'fieldset',
      { class: 'field' },
      el('legend', { text: 'While the phase is' }),
      el('span', { class: 'row' }, ...boxes.map(({ p, box }) => el('label', { class: 'box' }, box, ` ${p}`))),
    ),
    fieldOf('Why', reason, 'At least 5 characters.'),
  )
  return form
}
