import type { FlushPlan } from '../../server/core/report.ts'
import { figure, fixed } from '../model/format.ts'
import { el, fill } from './dom.ts'

/** The computed flush, step by step, with what must be true before each, what ends it and what can hurt. Read only: nothing is moved from here. */
export function planView(close: () => void) {
  const body = el('div')
  const shut = el('button', { type: 'button', text: 'Close the plan', on: { click: close } })
  const title = el('h2', { tabindex: -1 })
  const node = el(
    'section',
    { class: 'plan sheet', id: 'plan', hidden: true, 'aria-label': 'Flush plan' },
    el('div', { class: 'head' }, title, shut),
    body,
  )
  node.addEventListener('keydown', (event) => {
    if (event.key === 'Escape') close()
  })
  let key = ''
  return {
    node,
    focus: () => title.focus(),
    show(plan: FlushPlan | null, open: boolean): void {
      node.hidden = !open || plan === null
      if (plan === null || !open) return
      const k = JSON.stringify(plan)
      if (k === key) return
      key = k
      title.textContent = `Flush of ${plan.segments.join(', ')}: ${plan.totalMinutes === null ? 'whole time not computed' : `${fixed(plan.totalMinutes, 0)} min in all`}`
      fill(
        body,
        el('p', {}, el('a', { class: 'button', id: 'go-flush', href: '#/flush', text: 'Go through it step by step' })),
        planBody(plan),
      )
    },
  }
}

/** The plan itself: cautions, steps, inventory, what was assumed and what could not be computed. */
export function planBody(plan: FlushPlan): HTMLElement {
  return el(
    'div',
    { class: 'plan-body' },
    el('p', { class: 'note', text: plan.cautions.join(' ') }),
    ...plan.steps.map((s) =>
      el(
        'article',
        { class: 'step', 'data-step': s.id },
        el('h3', { text: `${s.id} ${s.title}` }),
        el('p', { class: 'quant' }, ...quantities(s).map((t) => el('span', { text: t }))),
        lines(
          'Before it',
          s.holdPoints.map((t) => t.replace(/^Before this step: /, '')),
        ),
        lines('Ends when', s.endsWhen),
        lines('Can hurt', s.hazards, 'hurt'),
        plan.refused.some((r) => r.step === s.id)
          ? lines(
              'Not advised now',
              plan.refused.filter((r) => r.step === s.id).map((r) => r.reason),
              'hurt',
            )
          : null,
      ),
    ),
    el('h3', { text: 'What the line holds before F0, as if nothing had reacted' }),
    inventory(plan),
    lines('Assumed', plan.assumptions),
    lines('Not computed', plan.missing),
  )
}

/** Flow, volume and time of a step; a step without a liquid has only its time. */
function quantities(s: FlushPlan['steps'][number]): string[] {
  const time = s.minutes === null ? 'time not computed' : `${fixed(s.minutes, 0)} min`
  if (s.liquid === null) return [time]
  return [
    s.liquid,
    s.flowMlMin === null ? 'flow not computed' : figure(s.flowMlMin, 'mL/min'),
    s.volumeMl === null ? 'volume not computed' : `${fixed(s.volumeMl, 0)} mL`,
    time,
  ]
}

const lines = (name: string, texts: readonly string[], cls = ''): HTMLElement | null =>
  texts.length === 0
    ? null
    : el(
        'div',
        { class: `lines ${cls}` },
        el('p', { class: 'soft', text: name }),
        el('ul', {}, ...texts.map((t) => el('li', { text: t }))),
      )

function inventory(plan: FlushPlan): HTMLElement {
  const table = el(
    'table',
    {},
    el(
      'thead',
      {},
      el(
        'tr',
        {},
        ...['Segment', 'Volume [mL]', 'Reagents [mol]', 'Heat with water [kJ]', 'Rise [K]'].map((t, i) =>
          el('th', { scope: 'col', class: i === 1 || i > 2 ? 'num' : '', text: t }),
        ),
      ),
    ),
  )
  const rows = plan.inventory.map((i) =>
    el(
      'tr',
      {},
      el('th', { scope: 'row', text: i.segment }),
      el('td', { class: 'num', text: fixed(i.volumeMl, 1) ?? 'not known' }),
      el('td', { text: i.reagents.map((r) => `${r.name} ${fixed(r.mol, 3) ?? 'not known'}`).join(', ') || 'none' }),
      el('td', { class: 'num', text: fixed(i.hydrolysisKJ, 1) ?? 'none' }),
      el('td', { class: 'num', text: fixed(i.hydrolysisRiseK, 0) ?? 'none' }),
    ),
  )
  table.append(el('tbody', {}, ...rows))
  return el('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': 'Inventory' }, table)
}
