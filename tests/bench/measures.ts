import { isMainThread, Worker, workerData } from 'node:worker_threads'
import { fileSource } from '../../server/analyse.ts'
import { cell, phases } from '../../server/core/reading.ts'
import { importRun } from '../../server/import-run.ts'
import { importInThread, importThread, threadLimits } from '../../server/import-thread.ts'
import { readLogs } from '../../server/ingest/csv/read-log.ts'
import { openStore } from '../../server/store/open.ts'
import { cpuS, inFolder, type Measured, pairIn } from './common.ts'
import { derive } from './derive.ts'
import { channels, skid, skidText } from './input.ts'
import { live } from './live.ts'
import { commits, hour, size, traces } from './store-measures.ts'
import { boundParse, type Sums, splitParse } from './yardsticks.ts'

const textOf = ({ rows, sums }: Sums): string => `${rows} ${Array.from(sums).join(' ')}`
const add = (into: Sums, block: { rows: number; width: number; values: Float64Array; codes: Uint8Array }): void => {
  into.rows += block.rows
  for (let r = 0, at = 0; r < block.rows; r++, at += block.width)
    for (let c = 0; c < channels; c++) if (block.codes[at + c] === cell.value) into.sums[c]! += block.values[at + c]!
}
const noSums = (): Sums => ({ rows: 0, sums: new Float64Array(channels) })

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
async function importing(file: string, check: boolean): Promise<Measured> {
  return inFolder(async (dir) => {
    const store = openStore(dir)
    const pair = pairIn(store)
    const from = cpuS()
    await importInThread({ entry: new URL(import.meta.url), data: dir, toolVersion: 'bench' })(
      {
        ...pair,
        skidFile: 'bench.json',
        skidText,
        logs: [{ name: 'day.csv', path: file }],
        acts: [],
        startMs: null,
        pauseMs: null,
      },
      { progress: () => undefined, signal: new AbortController().signal },
    )
    store.upkeep()
    const spent = cpuS() - from
    const rssMb = process.resourceUsage().maxRSS / 1024
    const sums = noSums()
    if (check) for (const { entry } of store.sequence.read(pair.run, 0)) if (entry.kind === 'rows') add(sums, entry.block)
    const alarms = store.events.list(pair.run).filter((e) => e.kind === 'alarm').length
    store.close()
    return { cpuS: spent, rssMb, ...(check ? { sum: textOf(sums) } : {}), figures: { alarms } }
  })
}

/** An import of many days in a thread as the command has one, its log made as it is read. */
async function importingDays(file: string, days: number): Promise<Measured> {
  return inFolder(async (dir) => {
    const store = openStore(dir)
    const order: Days = { data: dir, pair: pairIn(store), file, days }
    await new Promise<void>((done, fail) => {
      const thread = new Worker(new URL(import.meta.url), { workerData: { order }, argv: [], resourceLimits: threadLimits })
      thread.on('error', fail)
      thread.on('exit', () => done())
    })
    store.upkeep()
    const rssMb = process.resourceUsage().maxRSS / 1024
    const { rows } = store.sequence.count(order.pair.run)
    store.close()
    return { cpuS: 0, rssMb, figures: { rows } }
  })
}

interface Days {
  readonly data: string
  readonly pair: ReturnType<typeof pairIn>
  readonly file: string
  readonly days: number
}

async function daysInThread({ data, pair, file, days }: Days): Promise<void> {
  const store = openStore(data, { joined: true })
  const source = { name: 'long.csv', chunks: repeated(file, days) }
  await importRun({ store, ...pair, skid: skid(), sources: [source], startMs: null, acts: [] })
  store.close()
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

const measures: Readonly<Record<string, (...args: string[]) => Promise<Measured> | Measured>> = {
  bound: (file) => work(() => boundParse(file!)),
  split: (file) => work(() => splitParse(file!)),
  read: (file) => work(() => read(file!)),
  import: (file, check) => importing(file!, check === 'check'),
  'import-days': (file, days) => importingDays(file!, Number(days)),
  size: (kind, rows) => size(kind as 'normal', Number(rows)),
  traces: (days, hz) => traces(Number(days), Number(hz)),
  hour: (days) => hour(Number(days)),
  commits: (count) => commits(Number(count)),
  live: (skids, seconds) => live(Number(skids), Number(seconds)),
  'live-import': (file) => live(1, 5, file!),
  derive: () => derive(),
}

const [name = '', ...args] = process.argv.slice(2)
if (isMainThread) process.stdout.write(`${JSON.stringify(await measures[name]!(...args))}\n`)
else if ((workerData as { order?: Days }).order !== undefined) await daysInThread((workerData as { order: Days }).order)
else await importThread()
