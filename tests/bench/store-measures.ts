import { readdirSync, statSync } from 'node:fs'
import { join } from 'node:path'
import { cell, rowBlock } from '../../server/core/reading.ts'
import type { RunId } from '../../server/store/keys.ts'
import { openStore, type Store } from '../../server/store/open.ts'
import { cpuS, inFolder, type Measured, pairIn } from './common.ts'
import { channels, course, startMs } from './input.ts'
import { bareFsync, rowAScan } from './yardsticks.ts'

const bytesIn = (dir: string): number =>
  readdirSync(dir).reduce((n, f) => n + (f.startsWith('clearbore.db') ? statSync(join(dir, f)).size : 0), 0)

/** Fills a store without a reader: rows of `course`, ten a second, in blocks. */
function fill(
  store: Store,
  run: RunId,
  rows: number,
  kind: 'normal' | 'hard' | 'random',
  each?: (r: number, values: Float64Array) => void,
): void {
  const size = 8192
  const block = rowBlock(size, channels)
  block.codes.fill(cell.value)
  const row = course(rows, kind)
  for (let r = 0; r < rows; r += size) {
    block.rows = Math.min(size, rows - r)
    for (let i = 0; i < block.rows; i++) {
      block.tMs[i] = startMs + 100 * (r + i)
      row(r + i, block.values, i * channels)
    }
    each?.(r, block.values)
    store.sequence.append([{ run, entries: [{ kind: 'rows', block }] }])
  }
}

/** Bytes of the whole database file a sample, and whether every reading came back to the bit. */
export function size(kind: 'normal' | 'hard' | 'random', rows: number): Measured {
  return inFolder((dir) => {
    const store = openStore(dir)
    const { run } = pairIn(store)
    fill(store, run, rows, kind)
    store.upkeep({ spareMb: 0 })
    const again = course(rows, kind)
    const v = new Float64Array(channels)
    let r = 0
    let wrong = 0
    for (const { entry } of store.sequence.read(run, 0)) {
      if (entry.kind !== 'rows') continue
      for (let i = 0; i < entry.block.rows; i++, r++) {
        again(r, v, 0)
        for (let c = 0; c < channels; c++) if (!Object.is(v[c], entry.block.values[i * channels + c])) wrong++
      }
    }
    store.close()
    return { cpuS: 0, rssMb: 0, figures: { bytesASample: bytesIn(dir) / (rows * channels), wrong, missing: rows - r } }
  })
}

const middle = (xs: readonly number[]): number => [...xs].sort((a, b) => a - b)[xs.length >> 1]!

/** 12 traces over the whole of a short and a long run, turn by turn, ms; both with one extreme a day planted in every trace. */
export function traces(days: number, hz: number): Measured {
  return inFolder((dir) => {
    const store = openStore(dir, { synchronous: 'NORMAL' })
    const step = Math.round(10 / hz)
    const make = (d: number) => {
      const { run } = pairIn(store)
      const rows = d * 86_400 * hz
      const size = 8192
      const block = rowBlock(size, channels)
      block.codes.fill(cell.value)
      const row = course(86_400 * hz, 'normal')
      for (let r = 0; r < rows; r += size) {
        block.rows = Math.min(size, rows - r)
        for (let i = 0; i < block.rows; i++) {
          block.tMs[i] = startMs + 100 * step * (r + i)
          row(r + i, block.values, i * channels)
          if ((r + i) % (86_400 * hz) === 4321) for (let c = 0; c < 12; c++) block.values[i * channels + c] = 1000 + (r + i)
        }
        store.sequence.append([{ run, entries: [{ kind: 'rows', block }] }])
      }
      store.upkeep()
      return { run, rows, toMs: startMs + 100 * step * rows, times: [] as number[] }
    }
    const runs = [make(1), make(days)]
    const tags = Array.from({ length: 12 }, (_, c) => c)
    let lost = 0
    for (let turn = 0; turn < 21; turn++)
      for (const r of runs) {
        const from = performance.now()
        const { tags: got } = store.readings.envelope(r.run, tags, startMs, r.toMs, 2000)
        r.times.push(performance.now() - from)
        for (const { max } of got) for (let day = 4321; day < r.rows; day += 86_400 * hz) if (!max.includes(1000 + day)) lost++
      }
    store.close()
    return { cpuS: 0, rssMb: 0, figures: { shortMs: middle(runs[0]!.times), longMs: middle(runs[1]!.times), lost } }
  })
}

/** One hour of all channels at full rate out of `days`, against a table with a row a scan of one day. */
export function hour(days: number): Measured {
  return inFolder((dir) => {
    const store = openStore(dir, { synchronous: 'NORMAL' })
    const table = rowAScan(join(dir, 'rows.db'))
    const { run } = pairIn(store)
    const tMs = new Float64Array(8192)
    const rows = days * 864_000
    fill(store, run, rows, 'normal', (r, values) => {
      const n = Math.min(8192, rows - r)
      for (let i = 0; i < n; i++) tMs[i] = startMs + 100 * (r + i)
      table.add(tMs, values, n)
    })
    store.upkeep()
    const tags = Array.from({ length: channels }, (_, c) => c)
    const from = startMs + 11 * 3_600_000 * days
    const ours: number[] = []
    const theirs: number[] = []
    let same = 1
    for (let turn = 0; turn < 11; turn++) {
      const a = cpuS()
      const mine = store.readings.samples(run, tags, from, from + 3_600_000)
      const b = cpuS()
      const yard = table.window(from, from + 3_600_000)
      theirs.push(cpuS() - b)
      ours.push(b - a)
      mine.forEach(({ values }, c) => {
        if (values.length !== 36_000 || values.some((x, i) => !Object.is(x, yard[c]![i]))) same = 0
      })
    }
    store.close()
    table.close()
    return { cpuS: 0, rssMb: 0, figures: { oursMs: 1000 * middle(ours), theirsMs: 1000 * middle(theirs), same } }
  })
}

/** A second's rows of one skid in one durable commit, against the bare flush of a page, turn by turn, ms. */
export function commits(count: number): Measured {
  return inFolder((dir) => {
    const store = openStore(dir)
    const { run } = pairIn(store)
    const flush = bareFsync(join(dir, 'bare'))
    const block = rowBlock(10, channels)
    block.rows = 10
    block.codes.fill(cell.value)
    const row = course(10 * count, 'normal')
    const ours: number[] = []
    const bare: number[] = []
    for (let k = 0; k < count; k++) {
      for (let i = 0; i < 10; i++) {
        block.tMs[i] = startMs + 100 * (10 * k + i)
        row(10 * k + i, block.values, i * channels)
      }
      const from = performance.now()
      store.sequence.append([{ run, entries: [{ kind: 'rows', block }] }])
      ours.push(performance.now() - from)
      bare.push(flush.once())
    }
    flush.close()
    store.close()
    return { cpuS: 0, rssMb: 0, figures: { oursMs: middle(ours), fsyncMs: middle(bare) } }
  })
}
