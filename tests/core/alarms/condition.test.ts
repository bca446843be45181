import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { type AlarmState, normal, stateName } from '../../../server/core/alarms/alarm-state.ts'
import { type ConditionState, idle, type Level, level, stepCondition } from '../../../server/core/alarms/condition.ts'
import { transition } from '../../../server/core/alarms/machine.ts'

const run = (levels: readonly [number, Level][], onDelayS: number, offDelayS: number) => {
  let state: ConditionState = idle
  const out: [number, string][] = []
  for (const [tS, now] of levels) {
    const step = stepCondition(state, tS * 1000, now, { onDelayS, offDelayS })
    state = step.state
    for (const i of step.inputs) out.push([tS, i])
  }
  return out
}

describe('level', () => {
  it('with a limit of 8 bar and a deadband of 0.5 bar is over above 8, under below 7.5, between otherwise; mirrored for a low limit', () => {
    expect([8.01, 8, 7.6, 7.49].map((v) => level(v, 8, 0.5, 'high'))).toEqual(['over', 'between', 'between', 'under'])
    expect([7.99, 8, 8.4, 8.51].map((v) => level(v, 8, 0.5, 'low'))).toEqual(['over', 'between', 'between', 'under'])
    expect(level(null, 8, 0.5, 'high')).toBe('bad')
    expect(level(8, 8, 0, 'high')).toBe('under')
  })
})

describe('delays (ALM-12)', () => {
  it('one sample over the limit is no alarm with an on-delay, at scans of 1 s and of 60 s, and one with none', () => {
    for (const scanS of [1, 60]) {
      const one: [number, Level][] = Array.from({ length: 10 }, (_, i) => [i * scanS, i === 4 ? 'over' : 'under'])
      expect(run(one, 2, 5)).toEqual([])
      expect(run(one, 0, 0).map(([, i]) => i)).toEqual(['act', 'clr'])
    }
  })
  // ALM-12
  it('noise of 0.4 bar about the limit with a deadband of 0.5 bar is exactly one occurrence', () => {
    const noisy: [number, Level][] = Array.from({ length: 600 }, (_, i) => [i, level(8 + 0.4 * Math.sin(i * 1.7), 8, 0.5, 'high')])
    expect(run(noisy, 0, 0)).toEqual([[1, 'act']])
  })
  it('a bad input drops what was pending and starts the full delay afresh: over since 0 s, bad at 2 s, good at 3 s, act at 6 s', () => {
    const levels: [number, Level][] = [0, 1, 2, 3, 4, 5, 6].map((t) => [t, t === 2 ? 'bad' : 'over'])
    expect(run(levels, 3, 3)).toEqual([
      [2, 'qbad'],
      [3, 'qgood'],
      [6, 'act'],
    ])
  })
  // ALM-06
  it('an alarm whose input goes bad never clears meanwhile', () => {
    const levels: [number, Level][] = [[0, 'over'], ...Array.from({ length: 50 }, (_, i): [number, Level] => [i + 1, 'bad'])]
    expect(run(levels, 0, 0)).toEqual([
      [0, 'act'],
      [1, 'qbad'],
    ])
  })
  it('before every act the condition was over at each sample for at least the on-delay; before every clr under for the off-delay', () => {
    const sample = fc.tuple(
      fc.integer({ min: 1, max: 5 }),
      fc.constantFrom<Level>('over', 'over', 'between', 'under', 'under', 'bad'),
    )
    fc.assert(
      fc.property(
        fc.array(sample, { maxLength: 200 }),
        fc.integer({ min: 0, max: 8 }),
        fc.integer({ min: 0, max: 8 }),
        (samples, on, off) => {
          let tS = 0
          const levels = samples.map(([dt, l]): [number, Level] => {
            tS += dt
            return [tS, l]
          })
          let active = false
          for (const [t, input] of run(levels, on, off)) {
            if (input !== 'act' && input !== 'clr') continue
            expect(input).toBe(active ? 'clr' : 'act')
            active = !active
            const want = input === 'act' ? 'over' : 'under'
            const last = levels.filter(([u]) => u <= t).reverse()
            const broken = last.findIndex(([, l]) => l !== want)
            const since = (broken === -1 ? last.at(-1) : last[broken - 1])?.[0] ?? t
            expect(t - since).toBeGreaterThanOrEqual(input === 'act' ? on : off)
          }
        },
      ),
    )
  })
})

/** A latching alarm of a shelvable class, on-delay 2 s, off-delay 5 s, sampled every 0.1 s: the worked test of common practice. */
describe('the worked course of a latching alarm', () => {
  const course = (over: (tS: number) => boolean, acts: Record<number, 'ack' | 'rst' | 'shv' | 'uns'>, endS: number) => {
    let condition = idle
    let state: AlarmState = normal
    const seen: [number, string][] = []
    const sounds: number[] = []
    for (let n = 0; n <= endS * 10; n++) {
      const tS = n / 10
      const step = stepCondition(condition, n * 100, over(tS) ? 'over' : 'under', { onDelayS: 2, offDelayS: 5 })
      condition = step.state
      const act = acts[tS]
      const inputs = [
        ...step.inputs.map((kind) => ({ kind })),
        ...(act === undefined ? [] : [{ kind: act, person: 'J. Brandt', reason: 'valve exercise', durationS: 1800 }]),
      ]
      for (const input of inputs) {
        const out = transition(state, input, {
          tMs: n * 100,
          alarm: 1,
          key: 'k',
          policy: { latching: true, shelveMaxS: 1800, shelveCapS: 28800, reasonMin: 5 },
          priority: 'medium',
          configVersion: '1',
          value: null,
          limit: null,
          unit: null,
        })
        state = out.state
        for (const r of out.records) {
          seen.push([tS, r.outcome === 'refused' ? `refused ${r.to}` : stateName(state)])
          if (r.sound) sounds.push(tS)
        }
      }
    }
    return { seen, sounds }
  }
  const pulse = (t: number) => t < 1.9 || (t >= 10 && t < 30)
  it('0 s over, 1.9 s below: nothing; 10 s over, 12 s UNACK with sound; 20 s ACKED; 30 s below, 35 s LACKED; 36 s reset, NORM', () => {
    const { seen, sounds } = course(pulse, { 20: 'ack', 36: 'rst' }, 40)
    expect(seen).toEqual([
      [12, 'UNACK'],
      [20, 'ACKED'],
      [35, 'LACKED'],
      [36, 'NORM'],
    ])
    expect(sounds).toEqual([12])
  })
  it('a reset at 25 s is refused and the state stays ACKED', () => {
    expect(course(pulse, { 20: 'ack', 25: 'rst' }, 26).seen.at(-1)).toEqual([25, 'refused ACKED'])
  })
  it('shelved at 15 s, below from 35 s and so clear at 40 s, unshelved at 60 s: LUNACK, no sound between', () => {
    const { seen, sounds } = course((t) => t >= 10 && t < 35, { 15: 'shv', 60: 'uns' }, 61)
    expect(seen).toEqual([
      [12, 'UNACK'],
      [15, 'SHELVED'],
      [40, 'SHELVED'],
      [60, 'LUNACK'],
    ])
    expect(sounds).toEqual([12])
  })
})
