import type { Course } from '../../server/wire/index.ts'
import { amount, filledShare, nameOf, standingRefusal, stepWords } from '../model/flush-now.ts'
import { el, fill, place, say, svg } from './dom.ts'

const words = { open: 'shut', running: 'running', accepted: 'accepted', skipped: 'skipped', aborted: 'aborted' } as const
/** Drawing units: 1000 along, 100 high. */
const wall = [14, 26, 74, 86] as const
const gate = 3

/**
 * The flush as a channel with gates. A chamber a step, as wide as its time in the plan; it fills with the volume passed (with time where nothing is
 * pumped); the gate behind it opens when the step is accepted. A gate that was asked for and refused carries the strokes of a limit.
 */
export function channelView(ask: (step: string) => void) {
  const g = svg('g')
  const picture = svg('svg', { viewBox: '0 0 1000 100', preserveAspectRatio: 'none', 'aria-hidden': 'true' }, g)
  const over = el('ol', { class: 'chambers' })
  const node = el('figure', { class: 'channel' }, el('div', { class: 'pic gates' }, picture), over)
  let key = ''
  let labels: { readonly state: HTMLElement; readonly amount: HTMLElement }[] = []

  /** Where each chamber begins and ends, by share of the planned time with a least width. */
  function edges(c: Course): number[] {
    const least = 0.09
    const minutes = c.steps.map((s) => Math.max(0, s.minutes ?? 0))
    const all = minutes.reduce((a, m) => a + m, 0)
    const free = 1 - least * c.steps.length
    const out = [0]
    for (const m of minutes) out.push(out.at(-1)! + 1000 * (least + (all > 0 ? (free * m) / all : free / c.steps.length)))
    return out
  }

  function draw(c: Course, nowMs: number): void {
    const at = edges(c)
    const refused = standingRefusal(c)
    const box = (x0: number, x1: number, cls: string) => svg('path', { class: cls, d: `M${x0} ${wall[1]}H${x1}V${wall[2]}H${x0}Z` })
    const parts: SVGElement[] = [svg('path', { class: 'k-wall', d: `M0 ${wall[0]}H1000V${wall[3]}H0Z` }), box(0, 1000, 'k-bore')]
    c.steps.forEach((s, i) => {
      const [x0, x1] = [at[i]!, at[i + 1]!]
      const share = filledShare(s, nowMs)
      if (share > 0) parts.push(box(x0, x0 + share * (x1 - x0), 'k-fill'))
      if (s.state === 'running')
        parts.push(svg('path', { class: 's-level', d: `M${x0 + share * (x1 - x0)} ${wall[1]}V${wall[2]}` }))
      if (i === 0) return
      const before = c.steps[i - 1]!
      const isOpen = before.state === 'accepted' || before.state === 'skipped'
      const [a, b] = [x0 - gate, x0 + gate]
      parts.push(
        svg('path', {
          class: 'k-gate',
          d: isOpen
            ? `M${a} ${wall[0]}H${b}V${wall[1] + 9}H${a}ZM${a} ${wall[2] - 9}H${b}V${wall[3]}H${a}Z`
            : `M${a} ${wall[0]}H${b}V${wall[3]}H${a}Z`,
        }),
      )
      if (refused?.step === s.step && refused.asked === 'started')
        for (let y = wall[1] + 6; y < wall[2]; y += 8) parts.push(svg('path', { class: 's-stroke', d: `M${b} ${y}l8 -7` }))
    })
    fill(g, ...parts)
  }

  return {
    node,
    show(c: Course, nowMs: number): void {
      const refused = standingRefusal(c)
      const k = JSON.stringify([c.flush, c.state, c.steps.map((s) => s.state), refused?.tMs])
      if (k !== key) {
        key = k
        const at = edges(c)
        const focused = over.contains(document.activeElement) ? (document.activeElement as HTMLElement).dataset['ask'] : undefined
        labels = []
        node.setAttribute('aria-label', `The course: ${c.steps.map((s) => `${nameOf(s.step)} ${words[s.state]}`).join(', ')}`)
        fill(
          over,
          ...c.steps.map((s, i) => {
            const isRefused = refused?.step === s.step && refused.asked === 'started'
            const state = el('span', { class: s.state === 'running' ? 'strong' : 'soft', text: words[s.state] })
            const passed = el('span', { class: s.state === 'running' ? 'strong' : 'soft' })
            labels.push({ state, amount: passed })
            const canAsk = c.state === 'running' && s.state === 'open'
            return place(
              el(
                'li',
                { class: `chamber ${s.state}`, 'data-step': s.step, 'data-state': s.state, 'data-refused': isRefused },
                el(
                  'p',
                  { class: 'n' },
                  canAsk
                    ? el(
                        'button',
                        {
                          type: 'button',
                          class: 'bare',
                          'data-ask': s.step,
                          'aria-label': `Ask for ${nameOf(s.step)}`,
                          on: { click: () => ask(s.step) },
                        },
                        el('b', { text: s.step }),
                      )
                    : el('b', { text: s.step }),
                  ` ${stepWords[s.step] ?? ''}`,
                ),
                el('p', {}, isRefused ? el('b', { class: 'tag inv', text: 'REFUSED' }) : state),
                el('p', { class: 'passed' }, passed),
              ),
              { x: at[i]! / 10, w: (at[i + 1]! - at[i]!) / 10 },
            )
          }),
        )
        if (focused !== undefined) over.querySelector<HTMLElement>(`[data-ask="${focused}"]`)?.focus()
      }
      for (const [i, s] of c.steps.entries()) say(labels[i]!.amount, amount(s))
      draw(c, nowMs)
    },
  }
}
