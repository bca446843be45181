import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { onTestFinished } from 'vitest'
import { demoScenario } from '../../server/core/sim/demo.ts'
import type { Scenario } from '../../server/core/sim/scenario.ts'
import type { Skid } from '../../server/core/skid.ts'
import { simulatedSource } from '../../server/ingest/simulated.ts'
import { createPair } from '../../server/monitor/catalogue.ts'
import { createMonitor, type MonitorOptions } from '../../server/monitor.ts'
import { loadSkid } from '../../server/skid/check.ts'
import type { Json, RunId } from '../../server/store/keys.ts'
import { openStore, type Store } from '../../server/store/open.ts'

export const heronFile = join(import.meta.dirname, '../../fixtures/skids/heron.yaml')
export const heronText = readFileSync(heronFile, 'utf8')
export const heron: Skid = loadSkid(heronText, 'heron.yaml')

/** A folder that is gone when the test ends. */
export function tempDir(): string {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-'))
  onTestFinished(() => rmSync(dir, { recursive: true, force: true }))
  return dir
}

/** A clock that stands until told. */
export function handClock(startMs = 0) {
  let now = startMs
  return {
    now: () => now,
    pass(ms: number): void {
      now += ms
    },
  }
}

/** A deposit early in a short night, so that fouling is found within an hour of the run. */
export function shortNight(hours: number): Scenario {
  const night = demoScenario(heron)
  return { ...night, hours, events: night.events.filter((e) => e.atHours < hours) }
}

export const newHeronRun = (store: Store) =>
  createPair(store, {
    kind: 'simulated', about: 'a test', skidId: 'heron', title: 'a night', skidFile: 'heron.yaml', skidText: heronText, startedMs: 0,
    toolVersion: 'test', state: 'live',
  }) // biome-ignore format: a list

/** A monitor over the simulated heron with hand-driven time. */
export function simulatedBench(
  dir: string,
  scenario: Scenario,
  more: Partial<MonitorOptions> & { pair?: { run: RunId; stepsRun: RunId } } = {},
) {
  const store = openStore(dir, { synchronous: 'NORMAL' })
  const clock = handClock()
  const lines: string[] = []
  const monitor = createMonitor({
    store,
    steadyMs: clock.now,
    log: (line) => lines.push(line),
    onFatal: (error) => {
      throw error
    },
    ...more,
  })
  const pair = more.pair ?? newHeronRun(store)
  const state: Json = store.sequence.sourceState(pair.run)
  const source = simulatedSource({ skid: heron, scenario, speed: 60, steadyMs: clock.now, state })
  monitor.add({ ...pair, skid: heron, source })
  return { store, clock, monitor, lines, ...pair, source }
}
