import { describe, expect, it } from 'vitest'
import { type JudgeMemory, judgeMemory, judgeRows, judgeStart, ruleColumns } from '../../../server/core/quality/judge.ts'
import { reasons, ruleOf } from '../../../server/core/quality/tag-rules.ts'
import { cell } from '../../../server/core/reading.ts'
import type { TagSpec } from '../../../server/core/skid.ts'

function judge(state: JudgeMemory, spec: TagSpec, code: number, value: number, tMs: number, flowing: boolean): string {
  const block = { width: 1, tMs: Float64Array.of(tMs), values: Float64Array.of(value), codes: Uint8Array.of(code) }
  const into = { sum: new Float64Array(1), used: new Float64Array(1), flaw: new Float64Array(1) }
  judgeRows(state, ruleColumns([ruleOf(spec)]), block, 0, 1, flowing, into)
  return reasons[into.flaw[0]!]!
}

const tag = (more: Partial<TagSpec>): TagSpec => ({
  tag: 'X-1', column: 'X-1', quantity: 'pressure', unit: 'bar', range: [0, 25], accuracyPct: 0.25, accuracyAssumed: true, signal: null, sensor: null,
  burnout: null, setpointFor: null, ...more,
}) // biome-ignore format: a list
const one = (spec: TagSpec, value: number, code: number = cell.value): string =>
  judge(judgeMemory(judgeStart(1)), spec, code, value, 0, true)

/** Reasons of readings `dtMs` apart. */
function series(spec: TagSpec, values: readonly number[], dtMs = 1000, flowing = true): string[] {
  const state = judgeMemory(judgeStart(1))
  return values.map((v, i) => judge(state, spec, cell.value, v, i * dtMs, flowing))
}

describe('quality of a reading', () => {
  // NAMUR NE 43 (from memory): 3.8 to 20.5 mA measures, 3.6 and below or 21 and above is a failure, between them undefined. SIG-01.
  it.each([
    [3.59, 'loop-failure'], [3.61, 'loop-undefined'], [3.79, 'loop-undefined'], [3.81, 'good'], [12, 'good'], [20.49, 'good'], [20.51, 'loop-undefined'],
    [20.99, 'loop-undefined'], [21.01, 'loop-failure'],
  ])('%f mA on a raw loop is %s', (mA, reason) => {
    expect(one(tag({ unit: 'mA' }), mA)).toBe(reason)
  }) // biome-ignore format: a table

  it('finds the same bands on a converted 4-20 mA signal: 25 bar of range, −0.31 bar (3.8 mA) measures, −0.63 bar (3.6 mA) does not', () => {
    const loop = tag({ signal: '4-20mA' })
    expect([-0.3, -0.32, -0.64, 25.7, 25.9, 26.6].map((v) => one(loop, v))).toEqual([
      'good', 'loop-undefined', 'loop-failure', 'good', 'loop-undefined', 'loop-failure',
    ]) // biome-ignore format: a list
  })

  it('calls an open thermocouple by its burn-out direction, both ways, and never a temperature', () => {
    const t = { quantity: 'temperature', unit: 'degC', range: [-100, 200] } as const
    expect(one(tag({ ...t, burnout: 'high' }), 200)).toBe('open-circuit')
    expect(one(tag({ ...t, burnout: 'low' }), -100)).toBe('open-circuit')
    expect(one(tag({ ...t, burnout: 'high' }), 199)).toBe('good')
  })

  it('takes 1e308 for out of range, an empty cell for missing, text for unreadable', () => {
    expect(one(tag({}), 1e308)).toBe('out-of-range')
    expect(one(tag({}), 0, cell.missing)).toBe('missing')
    expect(one(tag({}), 0, cell.unreadable)).toBe('unreadable')
    expect(one(tag({}), 5, cell.uncertain)).toBe('source-uncertain')
    expect(one(tag({}), 5, cell.bad)).toBe('source-bad')
  })

  it('rejects one reading that jumps 10 bar away and back', () => {
    expect(series(tag({}), [5, 5.01, 4.99, 15, 5, 5.01])).toEqual(['good', 'good', 'good', 'spike', 'good', 'good'])
  })

  it('learns a pump that pulsates by a tenth of the range instead of rejecting every other stroke for ever', () => {
    const strokes = Array.from({ length: 200 }, (_, i) => (i % 2 === 0 ? 5 : 7.5))
    expect(series(tag({}), strokes).slice(60)).not.toContain('spike')
  })

  it('takes a jump for a step at the third reading that agrees', () => {
    expect(series(tag({}), [5, 5.01, 4.99, 15, 15.02, 14.99, 15])).toEqual([
      'good',
      'good',
      'good',
      'spike',
      'spike',
      'good',
      'good',
    ])
  })

  it('calls a reading frozen after a minute and thirty repeats, but only while liquid flows', () => {
    const moving = Array.from({ length: 100 }, (_, i) => 5 + 0.01 * (i % 7))
    const stuck = [...moving, ...Array.from({ length: 100 }, () => 5.2)]
    const flowing = series(tag({}), stuck)
    expect(flowing.indexOf('frozen')).toBe(100 + 60)
    expect(flowing.slice(160).every((r) => r === 'frozen')).toBe(true)
    expect(series(tag({}), stuck, 1000, false)).not.toContain('frozen')
  })

  it('leaves a coarse quiet sensor alone: its own longest rest sets the time', () => {
    const coarse = Array.from({ length: 2000 }, (_, i) => (Math.floor(i / 45) % 2 === 0 ? 5 : 5.1))
    expect(series(tag({}), coarse)).not.toContain('frozen')
  })
})
