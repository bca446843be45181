import { readdirSync, statSync } from 'node:fs'
import { join } from 'node:path'
import { expect, it } from 'vitest'
import type { RunId } from '../../server/store/keys.ts'
import type { Store } from '../../server/store/open.ts'
import { aRun, close, newFolder, newStore } from '../store/helpers.ts'

const width = 24
const hour = 3_600_000

/** Rows a second apart, as a logger with three decimals writes them. */
function addHour(store: Store, run: RunId, from: number): void {
  const rows = 3600
  const block = {
    rows,
    width,
    tMs: new Float64Array(rows),
    values: new Float64Array(rows * width),
    codes: new Uint8Array(rows * width).fill(1),
  }
  for (let i = 0; i < rows; i++) {
    block.tMs[i] = 1.7e12 + (from + i) * 1000
    for (let c = 0; c < width; c++)
      block.values[i * width + c] =
        Math.round((10 + c + Math.sin((from + i) / 5000 + c) + ((i * 7919 + c * 31) % 13) * 0.002) * 1000) / 1000
  }
  store.sequence.append([{ run, entries: [{ kind: 'rows', block }] }])
}

function medianMs(act: () => void): number {
  const times = Array.from({ length: 21 }, () => {
    const start = performance.now()
    act()
    return performance.now() - start
  })
  return times.sort((a, b) => a - b)[10]!
}

const traces = Array.from({ length: 12 }, (_, i) => i)
function measure(store: Store, run: RunId) {
  const { fromMs, toMs } = store.readings.span(run)!
  return {
    whole: medianMs(() => store.readings.envelope(run, traces, fromMs, toMs + 1)),
    hour: medianMs(() => store.readings.samples(run, traces, toMs - hour, toMs)),
    rssMb: process.memoryUsage.rss() / 2 ** 20,
    handles: readdirSync('/proc/self/fd').length,
  }
}

it('costs after 60 days of one run, and with 500 runs in the store, what it cost after 10 days: trends, windows, memory, handles', () => {
  const dir = newFolder()
  const store = newStore(dir)
  const run = store.runs.create(aRun)
  const day = (n: number) => {
    for (let h = 0; h < 24; h++) {
      addHour(store, run, (n * 24 + h) * 3600)
      store.upkeep()
    }
  }
  for (let n = 0; n < 10; n++) day(n)
  const early = measure(store, run)
  for (let n = 10; n < 60; n++) day(n)
  const late = measure(store, run)
  for (let n = 0; n < 499; n++) {
    const other = store.runs.create({ ...aRun, title: `run ${n}` })
    addHour(store, other, n * 3600)
    store.runs.setState(other, 'ended')
  }
  store.upkeep()
  const crowded = measure(store, run)
  const listMs = medianMs(() => store.runs.list())
  close(store)
  const perSample = statSync(join(dir, 'clearbore.db')).size / (60 * 86_400 * width + 499 * 3600 * width)
  const show = (m: typeof early) =>
    `trend ${m.whole.toFixed(1)} ms, hour ${m.hour.toFixed(1)} ms, ${m.rssMb.toFixed(0)} MB, ${m.handles} handles`
  console.log(
    `10 days: ${show(early)}\n60 days: ${show(late)}\n500 runs: ${show(crowded)}, list ${listMs.toFixed(1)} ms\n${perSample.toFixed(2)} bytes a sample`,
  )
  for (const m of [late, crowded]) {
    // Six times the run must not show; three times leaves room for a busy machine and for where bucket widths fall on the cells.
    expect(m.whole).toBeLessThan(3 * early.whole)
    expect(m.hour).toBeLessThan(3 * early.hour)
    expect(m.rssMb).toBeLessThan(early.rssMb + 100)
    expect(m.handles).toBe(early.handles)
  }
  expect(listMs).toBeLessThan(50)
  expect(perSample).toBeLessThan(1.2)
}, 600_000)
