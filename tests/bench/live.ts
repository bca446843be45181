import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { monitorEventLoopDelay } from 'node:perf_hooks'
import { cell, type RowBlock, rowBlock } from '../../server/core/reading.ts'
import { importInThread } from '../../server/import-thread.ts'
import { createEngine } from '../../server/monitor/engine.ts'
import { openStore } from '../../server/store/open.ts'
import { type Measured, pairIn } from './common.ts'
import { channels, course, skid, skidText, startMs } from './input.ts'

const importBeside = (data: string, pair: ReturnType<typeof pairIn>, log: string): Promise<unknown> =>
  importInThread({ entry: new URL(import.meta.url), data, toolVersion: 'bench' })(
    { ...pair, skidFile: 'bench.json', skidText, logs: [{ name: 'beside.csv', path: log }], acts: [], startMs: null, pauseMs: 2 },
    { progress: () => undefined, signal: new AbortController().signal },
  )

/**
 * Skids of 24 tags at 10 Hz in one process in real time: each second their rows go into one commit, through each one's pipeline, and what that said
 * into the journal. `late` counts ticks that began more than half a second after they were due. No page is attached. With a `log`, that is imported
 * beside them as the server does it, and the ticks go on to its end.
 */
export async function live(skids: number, seconds: number, log?: string): Promise<Measured> {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-bench-'))
  const store = openStore(dir)
  const engines = Array.from({ length: skids }, () => createEngine({ skid: skid(), store, ...pairIn(store) }))
  const row = course(36_000, 'normal')
  const second = (k: number): RowBlock => {
    const block = rowBlock(10, channels)
    block.rows = 10
    block.codes.fill(cell.value)
    for (let i = 0; i < 10; i++) {
      block.tMs[i] = startMs + 100 * (10 * k + i)
      row(10 * k + i, block.values, i * channels)
    }
    return block
  }
  const tick = (k: number): void => {
    const block = second(k)
    store.sequence.append(engines.map((e) => ({ run: e.run, entries: [{ kind: 'rows' as const, block }] })))
    for (const e of engines) e.push([{ kind: 'rows', block }])
    store.together(() => {
      for (const e of engines) e.journal()
    })
    for (const e of engines) e.news()
    store.upkeep({ maxMs: 20 })
  }
  // Ten minutes pass at once and are not counted: after five the detectors are armed.
  const before = 600
  for (let k = 0; k < before; k++) tick(k)
  const delay = monitorEventLoopDelay({ resolution: 10 })
  delay.enable()
  const from = performance.now()
  const cpu = process.cpuUsage()
  let late = 0
  let slowestMs = 0
  let importing = log !== undefined
  const imported = log === undefined ? Promise.resolve() : importBeside(dir, pairIn(store), log)
  void imported.finally(() => {
    importing = false
  })
  let k = 0
  for (; k < seconds || importing; k++) {
    const due = from + 1000 * (k + 1)
    await new Promise((resolve) => setTimeout(resolve, Math.max(0, due - performance.now())))
    const at = performance.now()
    if (at > due + 500) late++
    tick(before + k)
    slowestMs = Math.max(slowestMs, performance.now() - at)
  }
  await imported
  const spent = process.cpuUsage(cpu)
  delay.disable()
  const wallS = (performance.now() - from) / 1000
  const rows = store.sequence.count(engines[0]!.run).rows
  store.close()
  rmSync(dir, { recursive: true, force: true })
  const cpuS = (spent.user + spent.system) / 1e6
  return {
    cpuS,
    rssMb: process.resourceUsage().maxRSS / 1024,
    figures: {
      share: cpuS / wallS,
      late,
      slowestMs,
      loopP99Ms: delay.percentile(99) / 1e6,
      seconds: k,
      missing: 10 * (before + k) - rows,
    },
  }
}
