import type { AlarmRow, LiveState } from '../../server/wire/index.ts'
import type { ZoneClock } from '../model/clock.ts'
import { actionWords, inPlantTime } from '../model/words.ts'
import { count, el, fill } from './dom.ts'

/** The advice in force: why, what speaks for it and against, what is not ruled out, what is still open, and its plan. */
export function adviceView(clock: ZoneClock, openPlan: () => void) {
  const node = el('section', { class: 'sheet adv', 'aria-label': 'Advice' })
  let key = ''
  return {
    node,
    show(state: LiveState, alarm: AlarmRow | null, planOpen: boolean): void {
      const advice = state.advice[0]
      const k = JSON.stringify([
        advice?.atMs,
        advice?.action,
        advice?.segments,
        alarm?.id,
        alarm?.evidence,
        planOpen,
        state.advice.length,
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
      const about =
        state.alarms.find((a) => a.active && a.kind === 'fouling' && a.segment !== null && advice.segments.includes(a.segment)) ??
        alarm
      const pairs: [string, string, boolean][] = [['Why', inPlantTime(advice.reason, clock, state.clock.nowMs), false]]
      if (about !== null) {
        const e = about.evidence
        if (e.for.length > 0) pairs.push(['Speaks for', e.for.join('; '), false])
        if (e.against.length > 0) pairs.push(['Against', e.against.join('; '), true])
        if (e.notExcluded.length > 0) pairs.push(['Not ruled out', e.notExcluded.join('; '), true])
      }
      const plan = advice.plan
      if (plan !== null) {
        const points = plan.steps[0]?.holdPoints.length ?? 0
      pairs.push(['Still open', `${count(points, 'hold point')} before ${plan.steps[0]?.id ?? 'the first step'}; the shift lead must approve`, false])
    },
  }
}
