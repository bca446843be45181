import { describe, expect, it } from 'vitest'
import { createWatch } from '../../../server/core/fouling/watch.ts'
import { unjudgedText } from '../../../server/core/pipeline/verdict-said.ts'
import { duo, stepMs, stepper } from './steps.ts'

/** Notes of three hours in which a reading is missing from step 100 on, for so many steps. */
function notes(steps: number, lose: 'flow' | 'dp' | 'temperature') {
  const watch = createWatch(duo, stepMs)
  const step = stepper({ noisePa: 300, wander: 0 })
  const out: string[] = []
  for (let k = 0; k < 360; k++) {
    const whole = step(k, {})
    const gone = k >= 100 && k < 100 + steps
    const none = <T>(values: readonly T[]) => values.map(() => null)
    const seen = !gone
      ? whole
      : lose === 'flow'
        ? { ...whole, flow: none(whole.flow) }
        : lose === 'dp'
          ? { ...whole, dpPa: none(whole.dpPa) }
          : { ...whole, tempK: none(whole.tempK) }
    for (const e of watch.step(seen, [null, null]).events)
      if (e.kind === 'unjudged') out.push(`${k} ${unjudgedText(duo, e.segment, e.lacks)}`)
  }
  return out
}

// FOU-04
describe('a segment whose ratio lacks a reading', () => {
  it('is told after a quarter of an hour, once for each segment, with the reading that is missing; not after 14 min', () => {
    const flow = notes(200, 'flow')
    expect(flow.map((n) => n.slice(0, 6))).toEqual(['129 S1', '129 S2'])
    expect(flow[0]).toMatch(/no reading of \S+.*does not tell a deposit from more flow/)
    expect(notes(200, 'dp')[0]).toMatch(/no reading of its pressure drop/)
    expect(notes(28, 'flow')).toEqual([])
  })
})
