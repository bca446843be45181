import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { Detector, Sample, Verdict } from '../../../server/core/detectors/detector.ts'
import { detectors } from '../../../server/core/detectors/index.ts'

/** Every entry through one pair of eyes: the contract knows neither settings nor state. */
const entries = Object.values(detectors).map((entry) => ({
  name: entry.detector.name,
  detector: entry.detector as unknown as Detector<unknown, unknown>,
  usual: entry.usual as unknown,
}))

function freeze<T>(value: T): T {
  if (typeof value === 'object' && value !== null && !Object.isFrozen(value)) {
    Object.freeze(value)
    for (const part of Object.values(value)) freeze(part)
  }
  return value
}

const samples = fc
  .array(fc.option(fc.double({ min: -6, max: 6, noNaN: true }), { nil: null }), { maxLength: 150 })
  .map((values) => values.map((z, i): Sample => ({ tMs: 30_000 * i, z })))

describe.each(entries)('detector $name keeps the contract', ({ detector, usual }) => {
  const run = (list: readonly Sample[], between: (state: unknown) => unknown = (s) => s) => {
    let state = detector.start(usual)
    const verdicts: Verdict[] = []
    for (const sample of list) {
      const out = detector.step(usual, between(state), sample)
      state = out.state
      verdicts.push(out.verdict)
    }
    return { state, verdicts }
  }

  it('changes nothing it is given', () => {
    freeze(usual)
    fc.assert(fc.property(samples, (list) => void run(freeze(list), freeze)))
  })

  it('state and verdicts survive JSON at every step: a restart goes on as if nothing had happened', () => {
    fc.assert(
      fc.property(samples, (list) => {
        expect(run(list, (state) => JSON.parse(JSON.stringify(state)))).toEqual(run(list))
      }),
    )
  })

  it('a gap or a value that is no number leaves the state and the verdict as they were', () => {
    fc.assert(
      fc.property(samples, fc.constantFrom(null, Number.NaN, Number.POSITIVE_INFINITY), (list, z) => {
        const before = run([{ tMs: -30_000, z: 0.1 }, ...list])
        const out = detector.step(usual, before.state, { tMs: 30_000 * (list.length + 1), z })
        expect(out.state).toEqual(before.state)
        expect(out.verdict).toEqual(before.verdicts.at(-1))
      }),
    )
  })

  it('is quiet on a constant at its baseline for 2000 samples, and its state stays below 10 kB', () => {
    const { state, verdicts } = run(Array.from({ length: 2000 }, (_, i) => ({ tMs: 30_000 * i, z: 0 })))
    expect(verdicts.every((v) => v.kind === 'quiet')).toBe(true)
    expect(JSON.stringify(state).length).toBeLessThan(10_000)
  })

  it('speaks on a rise to 12σ within 4 h', () => {
    const { verdicts } = run(Array.from({ length: 480 }, (_, i) => ({ tMs: 30_000 * i, z: i / 40 })))
    expect(verdicts.some((v) => v.kind !== 'quiet')).toBe(true)
  })

  it('gives the same answer twice', () => {
    fc.assert(
      fc.property(samples, (list) => {
        expect(run(list)).toEqual(run(list))
      }),
    )
  })
})
