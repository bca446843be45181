import type { ActSent, Course, CourseStep } from '../../server/wire/index.ts'
import {
  cannotSkip,
  cautionsOf,
  isReady,
  keyOf,
  nameOf,
  nextStep,
  recordable,
  runningStep,
  standingRefusal,
} from '../model/flush-now.ts'
import { el, fill, say } from './dom.ts'
import { stateSign } from './flush-points.ts'

type FlushSent = Extract<ActSent, { readonly kind: 'flush-step' | 'flush-check' }>

/** What is pressed on the flush page: one next action, the record of what a person sees, skip with a reason, and abort, which never scrolls away. */
export function flushHands(hms: (tMs: number) => string, send: (act: FlushSent) => Promise<string>) {
  const answer = el('p', { class: 'answered', role: 'status', hidden: true })
  const refusal = el('section', { class: 'sheet refusal', 'aria-label': 'Refused', hidden: true })
  const next = el('div', { class: 'row next' })
  const why = el('p', { class: 'soft', id: 'why-not' })
  const form = checkForm()
  const cautions = el('ul', { class: 'cautions' })
  const cautionsTitle = el('h2')
  const cautionsBox = el('section', { 'aria-label': 'Cautions' }, el('div', { class: 'head' }, cautionsTitle), cautions)
  const end = endBox()
  const node = el('div', { class: 'hands' }, refusal, answer, next, why, form.node, cautionsBox, end.node)
  let course: Course | null = null
  let segment = ''
  let key = ''

  async function press(act: FlushSent): Promise<void> {
    const said = await send(act)
    answer.hidden = said === ''
    say(answer, said)
  }
  const stepAct = (step: string, state: 'started' | 'accepted' | 'skipped' | 'aborted', reason = ''): Promise<void> =>
    press({ kind: 'flush-step', segment, step, state, reason })

  function checkForm() {
    const point = el('select', { id: 'check-point' })
    const value = el('input', { id: 'check-value', type: 'text', maxlength: 120, autocomplete: 'off' })
    const source = el('input', { id: 'check-source', type: 'text', maxlength: 120, autocomplete: 'off' })
    const reason = el('input', { id: 'check-reason', type: 'text', maxlength: 300, autocomplete: 'off' })
    const reasonField = el('div', { class: 'entry' }, el('label', { for: 'check-reason', text: 'Reason' }), reason)
    const title = el('h2', { text: 'Record what a person sees' })
    const box = el(
      'form',
      { class: 'sheet check' },
      title,
      el('div', { class: 'entry' }, el('label', { for: 'check-point', text: 'Point' }), point),
      el(
        'div',
        { class: 'pair' },
        el('div', { class: 'entry' }, el('label', { for: 'check-value', text: 'Value, or what was seen' }), value),
        el('div', { class: 'entry' }, el('label', { for: 'check-source', text: 'Read where' }), source),
      ),
      reasonField,
      el(
        'div',
        { class: 'row' },
        el('button', { type: 'submit', id: 'check-met', text: 'Record as met' }),
        el('button', {
          type: 'button',
          class: 'small',
          id: 'check-failed',
          text: 'Record as failed',
          on: { click: () => void put('failed') },
        }),
      ),
    )
    let step: CourseStep | null = null
    let shown = ''
    const chosen = () => step?.points.find((p) => keyOf(p) === point.value)
    async function put(verdict: 'met' | 'failed'): Promise<void> {
      const p = chosen()
      if (step === null || p === undefined) return
      // Where a reason is needed it is asked for; the words of a first press stay.
      if ((verdict === 'failed' || p.by === 'readings') && reason.value.trim() === '') {
        reasonField.hidden = false
        reason.focus()
        return
      }
      const text = value.value.trim()
      const number = Number(text.replace(',', '.'))
      const isNumber = text !== '' && Number.isFinite(number)
      await press({
        kind: 'flush-check',
        segment,
        step: step.step,
        criterion: keyOf(p),
        verdict,
        value: text === '' ? null : isNumber ? number : text,
        source: source.value.trim(),
        reason: reason.value.trim(),
      })
      // What was taken leaves the field, unless the next is being typed already.
      if (answer.hidden && value.value.trim() === text) value.value = ''
      if (answer.hidden) {
        reason.value = ''
        dress()
      }
    }
    box.addEventListener('submit', (event) => {
      event.preventDefault()
      void put('met')
    })
    const dress = (): void => {
      const p = chosen()
      value.inputMode = p?.unit === 'ppm' ? 'decimal' : 'text'
      value.placeholder =
        p?.unit === 'ppm' ? 'result in ppm' : p?.by === 'readings' ? `hand reading${p.unit === null ? '' : ` in ${p.unit}`}` : ''
      reason.placeholder = p?.by === 'readings' ? 'why by hand' : 'why it failed'
      reasonField.hidden = p?.by !== 'readings' && reason.value === ''
    }
    point.addEventListener('change', dress)
    return {
      node: box,
      show(s: CourseStep | null): void {
        const open = s === null ? [] : recordable(s)
        box.hidden = open.length === 0
        step = s
        const k = open.map((p) => `${keyOf(p)} ${p.by}`).join('|')
        if (k === shown) return
        shown = k
        const was = point.value
        fill(
          point,
          ...open.map((p) => el('option', { value: keyOf(p), text: `${p.by === 'readings' ? 'hand reading: ' : ''}${p.needs}` })),
        )
        if (open.some((p) => keyOf(p) === was)) point.value = was
        dress()
      },
    }
  }

  function endBox() {
    const reason = el('input', { type: 'text', maxlength: 300, id: 'end-reason', autocomplete: 'off' })
    const label = el('label', { for: 'end-reason', text: '' })
    const go = el('button', { type: 'button', class: 'solid', id: 'end-now' })
    const back = el('button', { type: 'button', text: 'Back', on: { click: () => ask(null) } })
    const sure = el(
      'div',
      { class: 'sure', hidden: true },
      el('div', { class: 'entry' }, label, reason),
      el('div', { class: 'row' }, go, back),
    )
    const skip = el('button', { type: 'button', id: 'skip', on: { click: () => ask('skipped') } })
    const abort = el('button', { type: 'button', id: 'abort', text: 'Abort the flush', on: { click: () => ask('aborted') } })
    const note = el('p', { class: 'soft' })
    const box = el('div', { class: 'end' }, sure, el('div', { class: 'row' }, skip, abort), note)
    let what: 'skipped' | 'aborted' | null = null
    let step = ''
    let canSkip = false
    function ask(which: 'skipped' | 'aborted' | null): void {
      if (which === 'skipped' && !canSkip) return
      what = which
      sure.hidden = which === null
      say(label, which === 'aborted' ? 'Why the flush is aborted (may stay empty)' : `Why ${step} is skipped`)
      say(go, which === 'aborted' ? 'Abort now' : `Skip ${step}`)
      if (which !== null) reason.focus()
      else abort.focus()
    }
    go.addEventListener('click', () => {
      if (what === null) return
      void stepAct(step, what, reason.value.trim()).then(() => {
        reason.value = ''
        what = null
        sure.hidden = true
      })
    })
    box.addEventListener('keydown', (event) => {
      if (event.key === 'Escape') ask(null)
    })
    return {
      node: box,
      show(c: Course): void {
        const at = runningStep(c) ?? nextStep(c)
        box.hidden = c.state !== 'running'
        step = at?.step ?? c.steps[0]?.step ?? ''
        canSkip = at !== null && !cannotSkip.has(at.step)
        say(skip, `Skip ${step}, with reason`)
        skip.setAttribute('aria-disabled', String(!canSkip))
        say(
          note,
          `${canSkip ? '' : `${step} cannot be skipped. `}Abort ends the guidance only: what flows flows on until changed at the panel.`,
        )
      },
    }
  }

  return {
    node,
    gate: (step: string): Promise<void> => stepAct(step, 'started'),
    show(c: Course): void {
      course = c
      segment = c.segments[0] ?? ''
      const running = runningStep(c)
      const following = nextStep(c)
      const ready = running !== null && isReady(running)
      const refused = standingRefusal(c)
      const k = JSON.stringify([c.flush, c.state, running?.step, following?.step, ready, refused?.tMs])
      if (k !== key) {
        key = k
        const had = next.contains(document.activeElement)
        drawNext(running, following, ready)
        drawRefusal(refused)
        drawCautions(running ?? following)
        if (had) next.querySelector('button')?.focus()
      }
      form.show(running)
      end.show(c)
      if (c.state !== 'running') cautionsBox.hidden = true
    },
  }

  function drawNext(running: CourseStep | null, following: CourseStep | null, ready: boolean): void {
    const open = course?.state === 'running'
    next.hidden = !open
    why.hidden = !open
    if (running !== null) {
      const accept = el('button', {
        type: 'button',
        class: ready ? 'solid' : '',
        id: 'next-action',
        'aria-disabled': String(!ready),
        'aria-describedby': 'why-not',
        text: `Accept ${nameOf(running.step)}`,
        on: { click: () => void (ready ? stepAct(running.step, 'accepted') : undefined) },
      })
      fill(next, accept)
      say(
        why,
        ready
          ? 'Accepting stores every check with your name.'
          : `${running.step} can be accepted when all ${running.points.length} points are met.`,
      )
    } else if (following !== null) {
      fill(
        next,
        el('button', {
          type: 'button',
          class: 'solid',
          id: 'next-action',
          'aria-describedby': 'why-not',
          text: `Record ${nameOf(following.step)} as begun`,
          on: { click: () => void stepAct(following.step, 'started') },
        }),
      )
      say(why, 'Advised under the site procedure, by whoever it names. Clearbore moves nothing; it times, counts and records.')
    } else fill(next)
  }

  function drawRefusal(refused: Course['refusals'][number] | null): void {
    refusal.hidden = refused === null
    if (refused === null) return
    const most = 3
    const asked = refused.asked === 'started' ? nameOf(refused.step) : `${nameOf(refused.step)}, ${refused.asked}`
    fill(
      refusal,
      el('div', { class: 'head' }, el('h2', { text: `${asked}: refused` }), el('b', { class: 'tag inv', text: 'REFUSED' })),
      el('p', { text: `Asked for by ${refused.person} at ${hms(refused.tMs)}. On record.` }),
      el(
        'ul',
        { class: 'reasons' },
        ...refused.reasons
          .slice(0, most)
          .map((r) =>
            el(
              'li',
              {},
              stateSign(/not known/.test(r) ? 'unknown' : /failed/.test(r) ? 'failed' : 'not-yet'),
              el('span', { text: r }),
            ),
          ),
        refused.reasons.length > most ? el('li', { class: 'soft', text: `and ${refused.reasons.length - most} more` }) : null,
      ),
    )
  }

  function drawCautions(step: CourseStep | null): void {
    const texts = step === null ? [] : (cautionsOf[step.step] ?? [])
    cautionsBox.hidden = texts.length === 0
    say(cautionsTitle, step === null ? '' : `Cautions for ${step.step}`)
    fill(cautions, ...texts.map((text) => el('li', { text })))
  }
}
