import { describe, expect, it } from 'vitest'
import { createMode, type Mode, type ModeState } from '../../../server/core/fouling/mode.ts'
import { duo, type StepOver, stepper } from './steps.ts'

const step = stepper()
/** Steps one after the other, each described or repeated; gives what the mode said of each. */
function through(list: readonly (readonly [times: number, over: StepOver])[], saved?: ModeState): Mode[] {
  const mode = createMode(duo, saved)
  const out: Mode[] = []
  for (const [times, over] of list) for (let i = 0; i < times; i++) out.push(mode.step(step(out.length, over)))
  return out
}
const inferred = (over: StepOver = {}): StepOver => ({ ...over, production: null })

describe('production by the log’s own word', () => {
  it('a step is in production at 90 % of its scans, not at 89 %', () => {
    expect(through([[1, { production: 0.9 }]])[0]).toMatchObject({ production: true, inferred: false, begins: true })
    expect(through([[1, { production: 0.89 }]])[0]).toMatchObject({ production: false })
  })

  it('one step of another word ends nothing: no stop, no new begin, the count of steps goes on', () => {
    const out = through([[20, {}], [1, { production: 0 }], [1, {}]]) // biome-ignore format: a table
    expect(out[20]).toMatchObject({ production: false, stops: false })
    expect(out[21]).toMatchObject({ production: true, begins: false, steps: 21, armed: true })
  })

  it('16 steps out of it, 8 min, are a stop, told once; 15 are not', () => {
    const out = through([[20, {}], [40, { production: 0 }]]) // biome-ignore format: a table
    expect(out.flatMap((m, i) => (m.stops ? [i] : []))).toEqual([35])
    expect(through([[20, {}], [15, { production: 0 }], [5, {}]]).some((m) => m.stops || (m.begins && m.steps > 1))).toBe(false) // biome-ignore format: a table
  })

  it('arms with the 11th step of a run, and after a stop with the 25th', () => {
    const out = through([[30, {}], [16, { production: 0 }], [30, {}]]) // biome-ignore format: a table
    expect(out.findIndex((m) => m.armed)).toBe(10)
    const again = out.slice(46)
    expect(again[0]).toMatchObject({ begins: true, steps: 1 })
    expect(again.findIndex((m) => m.armed)).toBe(24)
  })

  it('the word alone does not do: below 40 % of its usual flow a stream is out of production', () => {
    const out = through([[20, {}], [1, { flowKgH: 2.5 }], [1, { flowKgH: 2.3 }]]) // biome-ignore format: a table
    expect(out[20]!.production).toBe(true)
    expect(out[21]!.production).toBe(false)
  })
})

describe('no data', () => {
  it('ends nothing: through 100 steps without readings production, its count and its arming stand', () => {
    const out = through([[20, {}], [100, { seen: 0 }], [1, { gapSteps: 100 }]]) // biome-ignore format: a table
    for (const m of out.slice(20, 120))
      expect(m).toMatchObject({ production: true, armed: true, steps: 20, stops: false, rests: false })
    expect(out[120]).toMatchObject({ production: true, begins: false, steps: 21 })
  })

  it('is no start either', () => {
    expect(through([[30, { seen: 0 }]]).every((m) => !m.production && !m.armed)).toBe(true)
  })
})

describe('production inferred', () => {
  it('begins once flow and temperatures have settled for four steps, and says that it was inferred', () => {
    const out = through([[10, inferred()]])
    expect(out.findIndex((m) => m.production)).toBe(3)
    expect(out[3]).toMatchObject({ inferred: true, begins: true })
  })

  it('waits while the flow still climbs by over 3 % or a temperature by over 0.8 K within two minutes', () => {
    const flow = Array.from({ length: 12 }, (_, i) => [1, inferred({ flowKgH: 3 + 0.25 * i })] as const)
    expect(through(flow).some((m) => m.production)).toBe(false)
    const warm = Array.from({ length: 12 }, (_, i) => [1, inferred({ tempC: 20 - 0.3 * i })] as const)
    expect(through(warm).some((m) => m.production)).toBe(false)
    expect(through([...warm, [4, inferred({ tempC: 16.6 })]]).at(-1)!.production).toBe(true)
  })

  it('a warm flush at full flow is none: 20 K above the usual for an hour ends production, and back in band it begins anew', () => {
    const out = through([[60, inferred({ tempC: -20 })], [120, inferred({ tempC: 0 })], [10, inferred({ tempC: -20 })]]) // biome-ignore format: a table
    expect(out.slice(60, 180).every((m) => !m.production)).toBe(true)
    expect(out.filter((m) => m.stops)).toHaveLength(1)
    expect(out.slice(180).findIndex((m) => m.begins)).toBeGreaterThanOrEqual(0)
  })

  it('a coolant step of 5 K stays production', () => {
    expect(through([[60, inferred({ tempC: -20 })], [60, inferred({ tempC: -15 })]]).slice(4).every((m) => m.production)).toBe(true) // biome-ignore format: one line
  })
})

describe('standstill', () => {
  it('is told when every pump stands below 3 %, and only with a flow reading', () => {
    const out = through([[20, {}], [1, { flowKgH: 0.1, production: 0 }], [1, { flowKgH: 1, production: 0 }], [1, { seen: 0 }]]) // biome-ignore format: a table
    expect(out.slice(20).map((m) => m.rests)).toEqual([true, false, false])
  })

  it('state survives JSON: stopped anywhere and resumed, every verdict is the same', () => {
    const list = [[15, {}], [18, { production: 0 }], [30, {}]] as const // biome-ignore format: a table
    const whole = through(list)
    const mode = createMode(duo)
    let state = mode.state
    const flat = list.flatMap(([n, over]) => Array.from({ length: n }, () => over as StepOver))
    const out = flat.map((over, k) => {
      const m = createMode(duo, JSON.parse(JSON.stringify(state)) as ModeState)
      const said = m.step(step(k, over))
      state = m.state
      return said
    })
    expect(out).toEqual(whole)
  })
})
