import { expect, it } from 'vitest'
import { layoutOf } from '../../../server/core/derive/layout.ts'
import { createObserver } from '../../../server/core/derive/observe.ts'
import { twoSegments } from '../../helpers/skids.ts'
import { stepper } from '../fouling/steps.ts'

// SIG-08
it('the zero at standstill is what is left of ΔP once the column of liquid is taken off: 1 m of THF at 20 °C weighs 87 mbar (density 0.887 g/mL, from memory)', () => {
  const skid = twoSegments()
  const up = { ...skid, segments: skid.segments.map((g) => ({ ...g, channel: { ...g.channel!, heightM: 1 } })) }
  const observer = createObserver(layoutOf(up))
  const step = stepper()
  for (let k = 0; k < 40; k++) observer.rest({ ...step(k, { flowKgH: 0 }), dpPa: [8700, 8700 + 1500] })
  expect(Math.abs(observer.state.zeroPa[0]!)).toBeLessThan(60)
  expect(observer.state.zeroPa[1]! - observer.state.zeroPa[0]!).toBeCloseTo(1500, 6)
})
