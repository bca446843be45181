import fc from 'fast-check'
import { expect, it } from 'vitest'
import { layoutOf } from '../../../server/core/derive/layout.ts'
import { against, type FlushAct } from '../../../server/core/flush/course-acts.ts'
import { freshGuide, type GuideState } from '../../../server/core/flush/course-state.ts'
import { createGuide } from '../../../server/core/flush/guide.ts'
import { freshScan } from '../../../server/core/scan/grid-state.ts'
import { heron, usual } from './heron.ts'

/** A grid of 10 s, so that a walk of hours is short. */
const scanMs = 10_000
const layout = layoutOf({ ...heron, scanSeconds: scanMs / 1000 })
const needs = {
  input: (segments: readonly string[]) => ({ skid: heron, segments, ratios: { R1: 1.5 }, given: usual }),
  baseline: () => null,
  alarms: () => [],
}
/** What the readings show for some minutes: pumps and temperature, or nothing good. */
const weathers = ['still-cold', 'flow-cold', 'still-warm', 'flow-warm', 'bad'] as const
type Weather = (typeof weathers)[number]
type Op =
  | { readonly kind: 'wait'; readonly weather: Weather; readonly seconds: number }
  | { readonly kind: 'act'; readonly pick: number; readonly what: number; readonly good: boolean }

const scans = new Map(
  weathers.map((weather) => {
    const scan = freshScan(heron.tags.length)
    heron.tags.forEach((t, i) => {
      const stream = heron.streams.find((x) => x.flowTag === t.tag)
      const kgH = stream === undefined ? 0 : (usual.flows as Record<string, number>)[stream.id]!
      const flow = weather.startsWith('flow') && stream?.id !== 'D' ? kgH / 3600 : 0
      scan.si[i] = t.quantity === 'temperature' ? (weather.endsWith('warm') ? 283 : 253) : t.quantity === 'pressure' ? 3e5 : flow
      scan.used[i] = weather === 'bad' ? 0 : 1
    })
    return [weather, scan] as const
  }),
)
function weatherScan(tMs: number, weather: Weather) {
  const scan = scans.get(weather)!
  scan.tMs = tMs
  return scan
}

const steps = ['F0', 'F1', 'F2', 'F3', 'F4', 'F5', 'F6'] as const
/** The act an operation means in this state: on the step that runs or is next, or on any other. */
function actOf(s: GuideState, op: Extract<Op, { kind: 'act' }>, tMs: number): FlushAct {
  const c = s.course
  const at = c?.state === 'running' ? c.steps.find((x) => x.state === 'running' || x.state === 'open') : undefined
  const step = op.good ? (at?.step ?? 'F0') : steps[op.pick % steps.length]!
  const base = { tMs, person: 'operator 1', segment: 'R1', step }
  const reason = op.pick % 3 === 0 ? '' : 'agreed with the shift lead'
  if (op.good && at?.state === 'running') {
    const p = at.points.find((x) => x.by === 'person' && x.state !== 'met')
    if (p !== undefined) {
      const criterion = p.part === null ? p.criterion : `${p.criterion}:${p.part}`
      return { ...base, kind: 'flush-check', criterion, verdict: 'met', value: op.pick % 100, source: 'at the skid', reason }
    }
    return { ...base, kind: 'flush-step', state: 'accepted', reason }
  }
  if (op.good) return { ...base, kind: 'flush-step', state: 'started', reason }
  const states = ['started', 'started', 'accepted', 'skipped', 'ended', 'refused'] as const
  if (op.what % 8 > 5) {
    const points = c?.steps.find((x) => x.step === step)?.points ?? []
    const p = points[op.pick % Math.max(1, points.length)]
    const criterion = p === undefined ? 'none' : p.part === null ? p.criterion : `${p.criterion}:${p.part}`
    const verdict = (['met', 'met', 'failed', 'skipped'] as const)[op.pick % 4]!
    return { ...base, kind: 'flush-check', criterion, verdict, value: op.pick % 5 === 0 ? null : 1, source: 'at the skid', reason }
  }
  return { ...base, kind: 'flush-step', state: states[op.what % states.length]!, reason }
}

const op: fc.Arbitrary<Op> = fc.oneof(
  {
    weight: 2,
    arbitrary: fc.record({
      kind: fc.constant('wait' as const),
      weather: fc.constantFrom(...weathers),
      seconds: fc.integer({ min: 10, max: 500 }),
    }),
  },
  {
    weight: 3,
    arbitrary: fc.record({ kind: fc.constant('act' as const), pick: fc.nat(1000), what: fc.nat(1000), good: fc.boolean() }),
  },
)
/** A walk that begins as the book says, so that many come to the gate of the water. */
const walk = fc
  .tuple(fc.integer({ min: 0, max: 3 }), fc.array(op, { minLength: 5, maxLength: 30 }))
  .map(([byTheBook, rest]): Op[] => {
    const good: Op = { kind: 'act', pick: 1, what: 0, good: true }
    const wait = (weather: Weather): Op => ({ kind: 'wait', weather, seconds: 500 })
    const book: Op[][] = [
      [good, wait('still-cold'), good, good, good],
      [good, wait('flow-cold'), good, good],
      [good, wait('still-warm'), good],
    ]
    return [...book.slice(0, byTheBook).flat(), ...rest]
  })

function follow(ops: readonly Op[], each: (s: GuideState, o: Op, weather: Weather | null) => void, saveAt = -1): GuideState {
  let guide = createGuide(layout, needs, freshGuide())
  let tMs = 1_000_000_000_000
  ops.forEach((o, i) => {
    if (o.kind === 'act') guide.act(actOf(guide.state, o, tMs))
    else for (let k = 0; k < o.seconds; k += scanMs / 1000, tMs += scanMs) guide.scan(weatherScan(tMs, o.weather), tMs + scanMs)
    if (i === saveAt) guide = createGuide(layout, needs, JSON.parse(JSON.stringify(guide.state)) as GuideState)
    each(guide.state, o, o.kind === 'wait' ? o.weather : null)
  })
  return guide.state
}

const abort: FlushAct = {
  kind: 'flush-step', tMs: 2e12, person: 'operator 2', segment: 'R1', step: 'F0', state: 'aborted', reason: '',
} // biome-ignore format: a list

// PRO-10
it('over 80 random walks: water never runs before F1 and F2 are accepted, no reading that is bad makes a point met, an abort is taken at any place', () => {
  let water = 0
  let aborts = 0
  fc.assert(
    fc.property(walk, (ops) => {
      const end = follow(ops, (s, _, weather) => {
        const c = s.course
        if (c === null) return
        const state = Object.fromEntries(c.steps.map((x) => [x.step, x.state]))
        if (state['F3'] === 'running' || state['F3'] === 'accepted') {
          water++
          expect([state['F1'], state['F2']]).toEqual(['accepted', 'accepted'])
        }
        for (const id of ['F1', 'F2', 'F4']) expect(state[id]).not.toBe('skipped')
        const running = c.steps.find((x) => x.state === 'running')
        if (weather === 'bad' && c.state === 'running' && running !== undefined)
          for (const p of running.points)
            if (p.by === 'readings' && p.person === null && p.criterion !== 'volume' && p.part !== 'alarms')
              expect([p.criterion, p.state]).not.toEqual([p.criterion, 'met'])
        if (c.state === 'running') {
          expect(against(s, abort)).toEqual([])
          aborts++
        }
      })
      const twin = createGuide(layout, needs, end)
      const open = end.course?.state === 'running'
      twin.act(abort)
      if (open) expect(end.course!.state).toBe('aborted')
    }),
    { numRuns: 80, seed: 21 },
  )
  expect(water).toBeGreaterThan(20)
  expect(aborts).toBeGreaterThan(400)
})

it('over 15 random walks: the same acts and scans give the same state, saved to text and resumed anywhere', () => {
  fc.assert(
    fc.property(walk, fc.nat(40), (ops, at) => {
      const whole = follow(ops, () => undefined)
      expect(JSON.stringify(follow(ops, () => undefined, at % ops.length))).toBe(JSON.stringify(whole))
    }),
    { numRuns: 15, seed: 22 },
  )
})

it('counts volume as the sum of flow over time: 500 s of the usual flow, less 60 s in which one meter is bad, to a part in a million', () => {
  const guide = createGuide(layout, needs, freshGuide())
  let tMs = 1_000_000_000_000
  const wait = (weather: Weather, seconds: number): void => {
    for (let k = 0; k < seconds; k += scanMs / 1000, tMs += scanMs) guide.scan(weatherScan(tMs, weather), tMs + scanMs)
  }
  guide.act({ kind: 'flush-step', tMs, person: 'operator 1', segment: 'R1', step: 'F0', state: 'started', reason: '' })
  wait('flow-cold', 240)
  wait('bad', 60)
  wait('flow-cold', 200)
  const s = guide.state.course!.steps[0]!
  const perSecond = guide.state.meters.reduce((a, m) => {
    const stream = heron.streams.find((x) => x.flowTag === heron.tags[m.tag]!.tag)!
    return a + ((usual.flows as Record<string, number>)[stream.id]! / 3600 / m.rho[0]!) * 1e6
  }, 0)
  expect(s.withoutFlowS).toBe(60)
  expect(Math.abs(s.passedMl / (440 * perSecond) - 1)).toBeLessThan(1e-6)
})

it('what a person called failed against good readings stays failed until a person takes it back with a reason; then readings decide again', () => {
  const guide = createGuide(layout, needs, freshGuide())
  let tMs = 1_000_000_000_000
  const wait = (weather: Weather, seconds: number): void => {
    for (let k = 0; k < seconds; k += scanMs / 1000, tMs += scanMs) guide.scan(weatherScan(tMs, weather), tMs + scanMs)
  }
  const flowB = () => guide.state.course!.steps[0]!.points.find((p) => p.part === 'flow B')!
  const check = (verdict: 'met' | 'failed', reason: string): void => {
    const base = { tMs, person: 'operator 1', segment: 'R1', step: 'F0', criterion: 'reagent-stopped:flow B' } as const
    guide.act({ ...base, kind: 'flush-check', verdict, value: 'drips', source: 'sight glass', reason })
  }
  guide.act({ kind: 'flush-step', tMs, person: 'operator 1', segment: 'R1', step: 'F0', state: 'started', reason: '' })
  wait('still-cold', 60)
  expect(flowB().state).toBe('met')
  check('met', 'looked at it')
  expect(guide.state.course!.refusals.at(-1)!.reasons[0]).toContain('good readings decide')
  check('failed', 'the glass drips')
  wait('flow-cold', 60)
  wait('still-cold', 60)
  expect(flowB()).toMatchObject({ state: 'failed', person: 'operator 1' })
  check('met', '')
  expect(flowB().state).toBe('failed')
  check('met', 'valve closed by hand')
  wait('still-cold', 60)
  expect(flowB()).toMatchObject({ state: 'met', person: null })
  expect(guide.state.course!.exceptions.map((x) => x.text.split(', ')[0])).toEqual([
    'reagent-stopped:flow B: failed',
    'reagent-stopped:flow B: no longer failed',
  ])
})
