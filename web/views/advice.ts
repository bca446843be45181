import type { AlarmRow, LiveState } from '../../server/wire/index.ts'
import type { ZoneClock } from '../model/clock.ts'
import { adviceInForce } from '../model/in-force.ts'
import { actionWords, inPlantTime } from '../model/words.ts'
import { count, el, fill } from './dom.ts'

/** The advice in force: why, what speaks for it and against, what is not ruled out, what is still open, and its plan. */
export function adviceView(clock: ZoneClock, openPlan: () => void) {
  const node = el('section', { class: 'sheet adv', 'aria-label': 'Advice' })
  let key = ''
  return {
    node,
    show(state: LiveState, alarm: AlarmRow | null, planOpen: boolean): void {
      const inForce = adviceInForce(state)
      const advice = inForce[0]?.advice
      const about = inForce[0]?.cause ?? alarm
      const k = JSON.stringify([
        advice?.atMs,
        advice?.action,
        advice?.segments,
        about?.id,
        about?.evidence,
        planOpen,
        inForce.map((f) => f.advice.atMs),
      ])
      if (k === key) return
      key = k
      const focused = node.contains(document.activeElement)
      if (advice === undefined) {
        fill(
          node,
          el(
            'p',
            {},
            el('b', { text: 'Nothing is advised. ' }),
            'Advice appears here with its reason as soon as something stands.',
          ),
        )
        return
      }
      const words = (texts: readonly string[]) => inPlantTime(texts.join('; '), clock, state.clock.nowMs)
      const pairs: [string, string, boolean][] = [['Why', inPlantTime(advice.reason, clock, state.clock.nowMs), false]]
      if (about !== null) {
        const e = about.evidence
        if (e.for.length > 0) pairs.push(['Speaks for', words(e.for), false])
        if (e.against.length > 0) pairs.push(['Against', words(e.against), true])
        if (e.notExcluded.length > 0) pairs.push(['Not ruled out', words(e.notExcluded), true])
      }
      const plan = advice.plan
      if (plan !== null) {
        const points = count(plan.steps[0]?.holdPoints.length ?? 0, 'hold point')
        pairs.push(['Still open', `${points} before ${plan.steps[0]?.id ?? 'the first step'}; the shift lead must approve`, false])
      }
      for (const { advice: other } of inForce.slice(1, 3))
        pairs.push(['Also', `${actionWords[other.action]}: ${inPlantTime(other.reason, clock, state.clock.nowMs)}`, true])
      pairs.push(['Given', `${clock.hms(advice.atMs)}; a recommendation under the site’s own procedure, it can be wrong`, true])
      const list = el('dl', { class: 'advice' })
      for (const [name, text, folds] of pairs)
        list.append(el('dt', { class: folds ? 'more' : '', text: name }), el('dd', { class: folds ? 'more' : '', text }))
      const all = el('button', {
        type: 'button',
        class: 'only-short',
        text: 'All evidence',
        'aria-expanded': String(node.classList.contains('whole')),
      })
      all.addEventListener('click', () => all.setAttribute('aria-expanded', String(node.classList.toggle('whole'))))
      const open =
        plan === null
          ? null
          : el('button', {
              type: 'button',
              class: 'solid',
              id: 'open-plan',
              text: planOpen ? 'Close the plan' : 'Open the flush plan',
              'aria-expanded': String(planOpen),
              on: { click: openPlan },
            })
      fill(node, list, el('div', { class: 'row' }, open, all))
      if (focused) (open ?? all).focus()
    },
  }
}
