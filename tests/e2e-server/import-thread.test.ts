import { writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { fileSource } from '../../server/analyse.ts'
import { importRun } from '../../server/import-run.ts'
import { importInThread } from '../../server/import-thread.ts'
import { createImports } from '../../server/imports.ts'
import { simulatedSource } from '../../server/ingest/simulated.ts'
import { createEngine } from '../../server/monitor/engine.ts'
import { createMonitor } from '../../server/monitor.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { openStore } from '../../server/store/open.ts'
import { pairIn } from '../bench/common.ts'
import { skid, skidText, writeLog } from '../bench/input.ts'
import { heron, newHeronRun, shortNight, tempDir } from '../monitor/bench.ts'
import { bundled, dropBundles } from './children.ts'

let entry: URL
beforeAll(() => {
  entry = pathToFileURL(bundled('server/main.ts'))
})
afterAll(dropBundles)

/** A store with an import queue whose imports run in threads. */
function bench() {
  const data = tempDir()
  const store = openStore(data)
  const log: string[] = []
  const imports = createImports({
    store,
    skidOf: loadSkid,
    toolVersion: 'test',
    wallMs: () => 0,
    log: (line) => log.push(line),
    changed: () => undefined,
    work: importInThread({ entry, data, toolVersion: 'test' }),
  })
  const begin = (path: string) =>
    imports.begin({
      title: 'a day', person: 'Anna', skidFile: 'bench.json', skidText, logs: [{ name: 'day.csv', path, bytes: 1 }], events: null, start: null,
      done: () => undefined,
    }) // biome-ignore format: a list
  const rowOf = (run: number) => store.runs.list().find((r) => r.id === run)!
  return { data, store, imports, begin, rowOf, log }
}

describe('imports in a thread of their own', () => {
  it('no scan of a live run comes half a second late while 30,000 rows of 24 tags are imported beside it, and the report is that of an import alone', async () => {
    const b = bench()
    const day = join(b.data, 'day.csv')
    writeLog(day, 30_000, 'normal')
    const monitor = createMonitor({
      store: b.store,
      steadyMs: () => performance.now(),
      log: (line) => b.log.push(line),
      onFatal: (error) => b.log.push(String(error)),
    })
    const pair = newHeronRun(b.store)
    const source = simulatedSource({
      skid: heron,
      scenario: shortNight(1),
      speed: 10,
      steadyMs: () => performance.now(),
      state: null,
    })
    monitor.add({ ...pair, skid: heron, source })
    const told: number[] = []
    monitor.publishTo({ news: () => told.push(performance.now()), runs: () => undefined })
    monitor.start(100)
    await new Promise((done) => setTimeout(done, 300))
    const from = performance.now()
    const run = b.begin(day)
    await b.imports.idle()
    const tookMs = performance.now() - from
    await new Promise((done) => setTimeout(done, 200))
    await monitor.stop()
    const gaps = told.slice(1).map((at, i) => at - told[i]!)
    expect(b.log).toEqual([])
    expect(b.rowOf(run).state).toBe('ended')
    expect(told.length).toBeGreaterThan(tookMs / 200)
    expect(Math.max(...gaps)).toBeLessThan(600)
    const entries = [...b.store.sequence.read(pair.run)].length
    expect(entries).toBeGreaterThan(0)

    const alone = openStore(tempDir())
    const same = pairIn(alone)
    await importRun({ store: alone, ...same, skid: skid(), sources: [fileSource(day)], startMs: null, acts: [] })
    const steps = b.store.runs.list().find((r) => r.source === `steps of run ${run}`)!.id
    const report = createEngine({ store: b.store, run, stepsRun: steps, skid: skid() }).report()
    expect(JSON.stringify(report)).toBe(JSON.stringify(createEngine({ store: alone, ...same, skid: skid() }).report()))
    expect(b.store.check()).toEqual([])
    alone.close()
    b.store.close()
  }, 60_000)

  it('a log that cannot be read is told in one line with its place, and the run stays listed as failed', async () => {
    const b = bench()
    const bad = join(b.data, 'day.csv')
    writeFileSync(bad, 'time,nothing\nx,y\n')
    const run = b.begin(bad)
    await b.imports.idle()
    expect(b.imports.busy(run)?.fault).toMatch(/day\.csv/)
    expect(b.log.length).toBe(1)
    expect(b.rowOf(run).state).toBe('importing')
    b.store.close()
  }, 30_000)

  it('a server that stops does not wait for the end of an import', async () => {
    const b = bench()
    const day = join(b.data, 'day.csv')
    writeLog(day, 30_000, 'normal')
    const run = b.begin(day)
    await new Promise((done) => setTimeout(done, 50))
    await b.imports.stop()
    expect(b.rowOf(run).state).toBe('importing')
    expect(b.store.sequence.count(run).rows).toBeLessThan(30_000)
    b.store.close()
  }, 30_000)
})
