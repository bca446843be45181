import { mkdtempSync, readdirSync, rmSync, statSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileSource } from '../../server/analyse.ts'
import { cell, phases, rowBlock } from '../../server/core/reading.ts'
import { importRun } from '../../server/import-run.ts'
import { type LogSource, readLogs } from '../../server/ingest/csv/read-log.ts'
import { createPair } from '../../server/monitor/catalogue.ts'
import type { RunId } from '../../server/store/keys.ts'
import { openStore, type Store } from '../../server/store/open.ts'
import { derive } from './derive.ts'
import { channels, course, skid, skidText, startMs } from './input.ts'
import { live } from './live.ts'
import { bareFsync, boundParse, rowAScan, type Sums, splitParse } from './yardsticks.ts'

/** What one measure gives: CPU of the work alone, user and system, without the start of the process; peak memory of the whole process. */
export interface Measured {
  readonly cpuS: number
  readonly rssMb: number
  /** Rows and sums by channel, as text to the last bit; both sides of a pair must give the same. */
  readonly sum?: string
  readonly figures?: Readonly<Record<string, number>>
}

const cpuS = (): number => {
  const u = process.cpuUsage()
  return (u.user + u.system) / 1e6
}
const textOf = ({ rows, sums }: Sums): string => `${rows} ${Array.from(sums).join(' ')}`
const add = (into: Sums, block: { rows: number; width: number; values: Float64Array; codes: Uint8Array }): void => {
  into.rows += block.rows
  for (let r = 0, at = 0; r < block.rows; r++, at += block.width)
    for (let c = 0; c < channels; c++) if (block.codes[at + c] === cell.value) into.sums[c]! += block.values[at + c]!
}
const noSums = (): Sums => ({ rows: 0, sums: new Float64Array(channels) })

function inFolder<T>(act: (dir: string) => T): T {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-bench-'))
  const clean = () => rmSync(dir, { recursive: true, force: true })
  const out = act(dir)
  if (out instanceof Promise) return out.finally(clean) as T
  clean()
  return out
}
const pairIn = (store: Store) =>
  createPair(store, {
    kind: 'imported', about: 'bench', skidId: 'bench', title: 'bench', skidFile: 'bench.json', skidText, startedMs: 0, toolVersion: 'bench', state: 'importing',
  }) // biome-ignore format: a list
const bytesIn = (dir: string): number =>
  readdirSync(dir).reduce((n, f) => n + (f.startsWith('clearbore.db') ? statSync(join(dir, f)).size : 0), 0)

async function work(act: () => Promise<Sums> | Sums): Promise<Measured> {
  const from = cpuS()
  const sums = await act()
  return { cpuS: cpuS() - from, rssMb: process.resourceUsage().maxRSS / 1024, sum: textOf(sums) }
}

async function read(file: string): Promise<Sums> {
  const out = noSums()
  const { blocks } = readLogs([fileSource(file)], { skid: skid(), words: [...phases], startMs: null })
  for await (const block of blocks) add(out, block)
  return out
}

/** The command `import`, with everything it does up to the report; then, unmeasured, every reading back out of the store. */
async function importing(source: LogSource, check: boolean): Promise<Measured> {
  return inFolder(async (dir) => {
    const store = openStore(dir)
    const { run, stepsRun } = pairIn(store)
    const from = cpuS()
    await importRun({ store, run, stepsRun, skid: skid(), sources: [source], startMs: null, acts: [] })
    store.upkeep()
    const spent = cpuS() - from
    const rssMb = process.resourceUsage().maxRSS / 1024
    const sums = noSums()
    if (check) for (const { entry } of store.sequence.read(run, 0)) if (entry.kind === 'rows') add(sums, entry.block)
    const alarms = store.events.list(run).filter((e) => e.kind === 'alarm').length
    store.close()
    return { cpuS: spent, rssMb, ...(check ? { sum: textOf(sums) } : {}), figures: { alarms } }
  })
}

/** The log of one day again and again, a day later each time, nine days at most: a long log without the disk it would take. */
async function* repeated(file: string, days: number): AsyncGenerator<Uint8Array> {
  for (let day = 0; day < days; day++) {
    let column = 0
    let isHead = day > 0
    for await (const chunk of fileSource(file).chunks) {
      let from = 0
      for (let i = 0; i < chunk.length; i++) {
        if (chunk[i] === 10) {
          if (isHead) from = i + 1
          isHead = false
          column = 0
        } else if (column++ === 9 && chunk[i] === 49) chunk[i] = 49 + day
      }
      yield chunk.subarray(from)
    }
  }
}

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
function size(kind: 'normal' | 'hard' | 'random', rows: number): Measured {
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
function traces(days: number, hz: number): Measured {
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
function hour(days: number): Measured {
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
function commits(count: number): Measured {
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

const measures: Readonly<Record<string, (...args: string[]) => Promise<Measured> | Measured>> = {
  bound: (file) => work(() => boundParse(file!)),
  split: (file) => work(() => splitParse(file!)),
  read: (file) => work(() => read(file!)),
  import: (file, check) => importing(fileSource(file!), check === 'check'),
  'import-days': (file, days) => importing({ name: 'long.csv', chunks: repeated(file!, Number(days)) }, false),
  size: (kind, rows) => size(kind as 'normal', Number(rows)),
  traces: (days, hz) => traces(Number(days), Number(hz)),
  hour: (days) => hour(Number(days)),
  commits: (count) => commits(Number(count)),
  live: (skids, seconds) => live(Number(skids), Number(seconds)),
  derive: () => derive(),
}

const [name = '', ...args] = process.argv.slice(2)
process.stdout.write(`${JSON.stringify(await measures[name]!(...args))}\n`)
