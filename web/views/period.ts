import { fromLocal, periods, toLocal } from '../model/alarm-figures.ts'
import type { ZoneClock } from '../model/clock.ts'
import { el } from './dom.ts'

export interface Period {
  readonly fromMs: number
  readonly toMs: number
}

/** Chooses a period of a run: one of the usual lengths up to its end, or any, in the plant's time. */
export function periodView(
  span: Period,
  clock: ZoneClock,
  zone: string,
  offered: readonly (typeof periods)[number]['id'][],
  first: (typeof periods)[number]['id'],
  chosen: (p: Period) => void,
) {
  const field = (id: string, text: string) => {
    const input = el('input', { type: 'text', id, size: 16, placeholder: '2031-01-14 03:12', autocomplete: 'off' })
    return { input, node: el('label', { class: 'when' }, el('span', { text }), input) }
  }
  const from = field('period-from', 'From')
  const to = field('period-to', 'To')
  const says = el('p', { class: 'refused', role: 'alert', hidden: true })
  const buttons = periods
    .filter((p) => offered.includes(p.id))
    .map((p) => ({
      p,
      b: el('button', { type: 'button', class: 'tab', text: p.text, on: { click: () => take(lastOf(p.ms), p.id) } }),
    }))
  const show = el('button', { type: 'submit', class: 'small', text: 'Show this period' })
  const form = el('form', { class: 'row period' }, from.node, to.node, el('span', { class: 'soft', text: zone }), show)
  const node = el(
    'div',
    { class: 'pick no-print' },
    el('div', { class: 'tabs', role: 'group', 'aria-label': 'Period' }, ...buttons.map((x) => x.b)),
    form,
    says,
  )

  const lastOf = (ms: number): Period => ({ fromMs: Math.max(span.fromMs, span.toMs - ms), toMs: span.toMs })
  function take(p: Period, id: string | null): void {
    says.hidden = true
    from.input.value = toLocal(p.fromMs, clock.offsetMs)
    to.input.value = toLocal(p.toMs, clock.offsetMs)
    for (const x of buttons) x.b.setAttribute('aria-pressed', String(x.p.id === id))
    chosen(p)
  }
  form.addEventListener('submit', (event) => {
    event.preventDefault()
    const fromMs = fromLocal(from.input.value, clock.offsetMs)
    const toMs = fromLocal(to.input.value, clock.offsetMs)
    const wrong =
      fromMs === null || toMs === null
        ? 'no time of the kind 2031-01-14 03:12 – write year, month, day, hour and minute'
        : toMs > fromMs
          ? null
          : 'the period ends before it begins – put the earlier time into From'
    if (wrong !== null || fromMs === null || toMs === null) {
      says.hidden = false
      says.textContent = `refused: ${wrong}`
      return
    }
    take({ fromMs, toMs }, null)
  })
  return { node, begin: () => take(lastOf(periods.find((p) => p.id === first)!.ms), first) }
}
