import { expect, it } from 'vitest'
import { reportText } from '../../server/core/pipeline/collect.ts'
import { createEngine } from '../../server/monitor/engine.ts'
import type { ActBody } from '../../server/wire/act.ts'
import { heron, shortNight, simulatedBench, tempDir } from './bench.ts'

const minutes = 50
const base = { person: 'operator 1', segment: 'R1' } as const
const step = (id: string, state: 'started' | 'accepted'): ActBody => ({ ...base, kind: 'flush-step', step: id, state, reason: '' })
const seen = (id: string, criterion: string, value: string): ActBody => ({
  ...base, kind: 'flush-check', step: id, criterion, verdict: 'met', value, source: 'at the skid', reason: '',
}) // biome-ignore format: a list
/** What the operator does, by minute of the run: in F1 from minute 37, water asked for too early, F2 from minute 44. */
const acts: readonly (readonly [minute: number, act: ActBody])[] = [
  [34, step('F0', 'started')],
  [36, seen('F0', 'outlet-diverted', 'in V-02')],
  [36, seen('F0', 'path-proven', '0.3 bar')],
  [36, step('F0', 'accepted')],
  [37, step('F1', 'started')],
  [38, step('F3', 'started')],
  [42, seen('F1', 'effluent-inactive', 'below 2 mmol/L')],
  [44, step('F1', 'accepted')],
  [44, step('F2', 'started')],
]

/** The night with stops before the minutes named; `atOnce`: killed right after that minute's acts, before their rows are taken. */
async function lived(stops: readonly { readonly minute: number; readonly cleanly: boolean; readonly atOnce?: boolean }[]) {
  const dir = tempDir()
  const night = shortNight(minutes / 60)
  let b = simulatedBench(dir, night, { snapshotMs: 7000 })
  const again = async (cleanly: boolean): Promise<void> => {
    if (cleanly) await b.monitor.stop()
    b.store.close()
    b = simulatedBench(dir, night, { snapshotMs: 7000, pair: { run: b.run, stepsRun: b.stepsRun } })
    // The simulator first returns to where it stood.
    while (await b.monitor.beat());
  }
  for (let minute = 0; minute <= minutes; minute++) {
    const stop = stops.find((s) => s.minute === minute)
    if (stop !== undefined && stop.atOnce !== true) await again(stop.cleanly)
    for (const [at, act] of acts) if (at === minute) b.monitor.act(b.run, act)
    if (stop?.atOnce === true) await again(stop.cleanly)
    b.clock.pass(1000)
    await b.monitor.beat()
  }
  const engine = createEngine({ store: b.store, run: b.run, stepsRun: b.stepsRun, skid: heron })
  const report = reportText(engine.report())
  const journal = JSON.stringify([b.store.events.list(b.run), b.store.transitions.list(b.run)])
  const feedA = heron.tags.findIndex((t) => t.tag === 'FT-101')
  const samples = b.store.readings.samples(b.run, [feedA], 0, 1e15)[0]!
  b.store.close()
  return { report, journal, rows: JSON.stringify([[...samples.tMs], [...samples.values]]) }
}

it('a flush goes on over five stops, two of them between an act and its rows: rows of the simulated operator, journal and report are those of a night left alone', async () => {
  const undisturbed = await lived([])
  const { flushes } = JSON.parse(undisturbed.report) as {
    flushes: { steps: { step: string; state: string; passedMl: number }[]; refusals: unknown[] }[]
  }
  expect(flushes[0]!.steps.map((s) => s.state).slice(0, 4)).toEqual(['accepted', 'accepted', 'running', 'open'])
  expect(flushes[0]!.steps[1]!.passedMl).toBeGreaterThan(500)
  expect(flushes[0]!.refusals).toHaveLength(1)
  const disturbed = await lived([
    { minute: 35, cleanly: false },
    { minute: 37, cleanly: false, atOnce: true },
    { minute: 40, cleanly: true },
    { minute: 44, cleanly: false, atOnce: true },
    { minute: 48, cleanly: false },
  ])
  expect(disturbed).toEqual(undisturbed)
})
