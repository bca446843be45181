import { describe, expect, it } from 'vitest'
import { createBank } from '../../../server/core/bank/bank.ts'
import { randomOf } from '../../../server/core/sim/random.ts'
import { duo, exponents, type Happening, observer } from './world.ts'

/** Runs the bank; the flow reading errs by `flowNoise` (white, relative), which is in lnFlow and, times −n0, in y. */
function bankAfter(steps: number, h: Happening, flowNoise = 0, known?: Parameters<typeof createBank>[4]) {
  const bank = createBank(duo, 30_000, undefined, undefined, known)
  const see = observer(duo, { noisePa: 100, wander: 0.0022, ...h })
  const r = randomOf(7, 'flow reading')
  for (let k = 0; k < steps; k++) {
    const e = flowNoise * r.normal()
    bank.step(
      see(k).map((o) => ({ ...o, lnFlow: o.lnFlow + e, y: o.y - o.n0 * e })),
      k > 10,
      0,
    )
  }
  return bank
}
const flow = (bank: ReturnType<typeof createBank>) => bank.exponents(0)!.flow

describe('the exponent of flow', () => {
  const moves = (k: number): number => [0, 0.1, -0.1, 0.15][Math.floor(k / 60) % 4]!

  it('is learnt from steps of 10 to 15 %: off by 0.06 from the hydraulics, found within 2 sd, and the data told', () => {
    const e = flow(bankAfter(480, { lnFlow: moves, exponentError: 0.06 }))
    expect(e.told).toBe(true)
    expect(Math.abs(e.value - exponents.n0 - 0.06)).toBeLessThan(2 * e.sd + 0.01)
    expect(e.sd).toBeLessThan(0.025)
  })

  it('stays that of the hydraulics where flow stands still, and says that nothing told otherwise', () => {
    const e = flow(bankAfter(480, {}))
    expect(e.told).toBe(false)
    expect(Math.abs(e.value - exponents.n0)).toBeLessThan(0.02)
  })

  it('is not taught by the noise of the flow reading: 0.1 % of it for two days at one flow moves n by less than 0.03', () => {
    const e = flow(bankAfter(5760, {}, 0.001))
    expect(e.told).toBe(false)
    expect(Math.abs(e.value - exponents.n0)).toBeLessThan(0.03)
  })

  it('starts where a step test left it, and then counts as told', () => {
    const known = [{ zeroChecked: true, flowExponent: { over: 0.06, sd: 0.01 } }, { zeroChecked: false, flowExponent: null }] // biome-ignore format: a table
    const bank = bankAfter(20, {}, 0, known)
    expect(flow(bank).told).toBe(true)
    expect(Math.abs(flow(bank).value - exponents.n0 - 0.06)).toBeLessThan(0.01)
    expect(bank.isCommissioned(0)).toBe(true)
    expect(bank.isCommissioned(1)).toBe(false)
    const again = createBank(duo, 30_000, JSON.parse(JSON.stringify(bank.save())))
    expect(again.exponents(0)).toEqual(bank.exponents(0))
    expect(again.isCommissioned(0)).toBe(true)
  })

  it('is null before the first reading', () => {
    expect(createBank(duo, 30_000).exponents(0)).toBeNull()
  })
})
