import { readFile, stat } from 'node:fs/promises'
import { basename } from 'node:path'
import { loadCommissioning } from '../commissioning-file.ts'
import { MonitorError } from '../core/errors.ts'
import { importInto } from '../import-task.ts'
import { importInThread } from '../import-thread.ts'
import { readEvents } from '../ingest/events-file.ts'
import { instantOf } from '../ingest/instant.ts'
import { createPair } from '../monitor/catalogue.ts'
import { createEngine } from '../monitor/engine.ts'
import { cautions } from '../record/facts.ts'
import { loadSkid } from '../skid/check.ts'
import { readSkidText } from '../skid/skid-path.ts'
import { openStore } from '../store/open.ts'
import type { Command } from './command.ts'
import { toolVersion } from './install.ts'
import { storeOptions, tellSigning } from './key-folder.ts'
import { readOptions, usage } from './options.ts'
import { progressLine } from './progress-line.ts'

const help = `Usage: clearbore import LOG.csv… --skid FILE --data DIR [--title TEXT] [--start T] [--events FILE] [--baseline FILE]

Puts one logged run, in one file or several, into the store; the pages show it from then on.

  LOG.csv…       pieces of one logger in any order, or the logs of different loggers
  --skid FILE    the skid file (YAML or JSON)
  --data DIR     the store's folder (default .clearbore); a server that uses it must be stopped, or upload on its page
  --title TEXT   how the run is listed (default: the first log's name)
  --keys DIR     where the key that signs the store's chains lies (default CLEARBORE_KEYS, else this user's state folder)
  --start T      when a log with elapsed seconds or bare times of day began
  --events FILE  CSV with time,kind,value,unit,person,note
  --baseline FILE  the record of a step test (commission --json) that the run begins with

Exit code 0; 1 when an input is wrong; 2 for a wrong command line; 3 when the machine fails. Nothing is kept of a failed import.
`

const text = { type: 'string' } as const

async function sizeOf(file: string): Promise<number> {
  try {
    return (await stat(file)).size
  } catch (cause) {
    throw new MonitorError('FILE_READ', 'no such log', { place: { file }, hint: 'check the path', cause })
  }
}

export const importCommand: Command = {
  name: 'import',
  summary: 'put a logged run into the store, visible in the pages',
  help,
  async run(args, io) {
    const { values: v, positionals: logs } = readOptions(
      'import',
      args,
      { skid: text, data: text, title: text, start: text, events: text, keys: text, baseline: text },
      true,
    )
    if (logs.length === 0) throw usage('import', 'import needs at least one LOG.csv')
    if (v.skid === undefined) throw usage('import', 'import needs --skid FILE')
    const skidText = await readSkidText(v.skid)
    const skid = loadSkid(skidText, v.skid)
    const startMs = v.start === undefined ? null : instantOf(v.start, skid.timeZone, '--start')
    let total = 0
    for (const log of logs) total += await sizeOf(log)
    const acts = v.events === undefined ? [] : readEvents(v.events, await readEventsFile(v.events), skid.timeZone)
    const begins =
      v.baseline === undefined
        ? {}
        : {
            commissioned: {
              known: await loadCommissioning(v.baseline, skid),
              reason: `step test ${basename(v.baseline)}`,
              person: 'clearbore import',
            },
          }
    const data = v.data ?? '.clearbore'
    const store = openStore(data, storeOptions(io, v.keys))
    const line = progressLine(io, 'import', total / 1e6, 'MB')
    try {
      const pair = createPair(store, {
        kind: 'imported',
        about: logs.map((l) => basename(l)).join(', '),
        skidId: skid.skid,
        title: v.title ?? basename(logs[0]!),
        skidFile: v.skid,
        skidText,
        startedMs: Date.now(),
        toolVersion: toolVersion(),
        state: 'importing',
      })
      try {
        const importing =
          io.program === undefined ? importInto(store) : importInThread({ entry: io.program, data, toolVersion: toolVersion() })
        const { rows, broken } = await importing(
          {
            ...pair, skidFile: v.skid, skidText, logs: logs.map((path) => ({ name: basename(path), path })), acts, startMs, pauseMs: null, ...begins,
          }, // biome-ignore format: a list
          { signal: io.signal, progress: (bytes) => line.update(Math.round(bytes / 1e5) / 10) },
        )
        line.end()
        store.upkeep()
        const report = createEngine({ store, ...pair, skid }).report()
        await io.out(
          `run ${pair.run}: ${rows} rows${broken > 0 ? ` (${broken} broken ones left out)` : ''}, ${report.alarms.length} ${report.alarms.length === 1 ? 'alarm' : 'alarms'}, ${report.run.from ?? 'no time'} to ${report.run.to ?? 'no time'}\n${cautions.join('\n')}\n`,
        )
        await tellSigning(io, store.trail.signing())
        return 0
      } catch (error) {
        const gone = { tMs: Date.now(), person: 'clearbore import', reason: 'the import did not reach its end' }
        for (const run of [pair.stepsRun, pair.run]) {
          try {
            store.runs.delete(run, gone)
          } catch {
            // A disk too full to delete leaves the run listed as failed.
          }
        }
        throw error
      }
    } finally {
      line.end()
      store.close()
    }
  },
}

async function readEventsFile(file: string): Promise<Uint8Array> {
  try {
    return await readFile(file)
  } catch (cause) {
    throw new MonitorError('FILE_READ', `cannot read: ${cause instanceof Error ? cause.message : String(cause)}`, {
      place: { file },
      cause,
    })
  }
}
