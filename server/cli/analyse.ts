import { readFile, stat } from 'node:fs/promises'
import { basename } from 'node:path'
import { parseArgs } from 'node:util'
import { analyseLog, fileSource } from '../analyse.ts'
import { loadCommissioning } from '../commissioning-file.ts'
import { MonitorError } from '../core/errors.ts'
import { reportText } from '../core/pipeline/collect.ts'
import { cannotRead } from '../file-trouble.ts'
import { readEvents } from '../ingest/events-file.ts'
import { instantOf } from '../ingest/instant.ts'
import { analyseRecord, isRecord } from '../record/analyse-record.ts'
import { loadSkid } from '../skid/check.ts'
import { loadSkidFile } from '../skid/skid-path.ts'
import { writeAtomic } from './atomic-file.ts'
import type { Command, Io } from './command.ts'
import { progressLine } from './progress-line.ts'
import { readSettings } from './settings-file.ts'
import { summaryText } from './summary-text.ts'

const help = `Usage: clearbore analyse LOG.csv… --skid FILE [--json OUT|-] [--from T] [--to T] [--start T] [--settings FILE] [--events FILE] [--baseline FILE]

Takes one logged run, in one file or several, through the very pipeline that runs live, and prints what it found.

  LOG.csv…         pieces of one logger in any order, or the logs of different loggers; '-' reads stdin;
                   or the record of one run (export --what record): its acts and settings are in it, and its skid file
  --skid FILE      the skid file (YAML or JSON); clearbore check-skid FILE tells whether it is good
  --json OUT       the whole report as JSON into a file; '-' writes it to stdout instead of the summary
  --from T --to T  only rows in this span (ISO 8601; without a zone in the skid's own)
  --start T        when a log with elapsed seconds or bare times of day began
  --settings FILE  other limits and another promise laid over the skid file:
                     detection: { falseAlarmDays: 30, riseToFindPct: 5 }
                     limits: { R1: { dpHighBar: 5.5 } }
                     versions:      # from a time of the log on, by the path of a setting
                       - { from: T, reason: weaker gasket, changes: { segments.R1.limits.dpHighBar: 5 } }
  --events FILE    CSV with time,kind,value,unit,person,note
  --baseline FILE  the record of a step test (commission --json): its accepted zeros and exponents are what the run begins with

Exit code 0; 1 when an input is wrong (the place and the mend on stderr); 2 for a wrong command line; 3 when the machine fails.
`

function options(args: readonly string[]) {
  try {
    const text = { type: 'string' } as const
    const { values, positionals } = parseArgs({
      args: [...args],
      allowPositionals: true,
      options: { skid: text, json: text, from: text, to: text, start: text, settings: text, events: text, baseline: text },
    })
    return { ...values, logs: positionals }
  } catch (cause) {
    throw new MonitorError('USAGE', cause instanceof Error ? cause.message.split('\n')[0]! : String(cause), {
      hint: 'clearbore analyse --help',
    })
  }
}

/** Reads a small text file. Errors: FILE_READ with its path. */
async function readText(file: string): Promise<Buffer> {
  try {
    return await readFile(file)
  } catch (cause) {
    throw cannotRead(file, cause)
  }
}

export const analyseCommand: Command = {
  name: 'analyse',
  summary: 'one logged run to a report',
  help,
  async run(args, io) {
    const o = options(args)
    if (o.logs.length === 1 && (await isRecord(o.logs[0]!))) return analyseOne(o.logs[0]!, o, io)
    if (o.skid === undefined) throw new MonitorError('USAGE', 'analyse needs --skid FILE', { hint: 'clearbore analyse --help' })
    if (o.logs.length === 0)
      throw new MonitorError('USAGE', 'analyse needs at least one log', { hint: 'clearbore analyse LOG.csv --skid FILE' })
    let skid = await loadSkidFile(o.skid)
    const other = o.settings === undefined ? null : readSettings(skid, (await readText(o.settings)).toString('utf8'), o.settings)
    if (other !== null) skid = other.skid
    const at = (text: string | undefined, option: string): number | null =>
      text === undefined ? null : instantOf(text, skid.timeZone, option)
    const span = { startMs: at(o.start, '--start'), fromMs: at(o.from, '--from'), toMs: at(o.to, '--to') }
    const events = o.events === undefined ? [] : readEvents(basename(o.events), await readText(o.events), skid.timeZone)
    const known = o.baseline === undefined ? undefined : await loadCommissioning(o.baseline, skid)
    let total = 0
    for (const log of o.logs)
      if (log !== '-') {
        try {
          total += (await stat(log)).size
        } catch (cause) {
          throw cannotRead(log, cause)
        }
      }
    const line = progressLine(io, 'analyse', total / 1e6, 'MB')
    const { report, tallies } = await analyseLog({
      skid,
      ...span,
      acts: [...(other?.acts ?? []), ...events],
      pipeline: known === undefined ? {} : { known },
      signal: io.signal,
      sources: o.logs.map((log) => (log === '-' ? { name: 'stdin', chunks: stdin() } : fileSource(log))),
      onProgress: (bytes) => {
        line.update(Math.round(bytes / 1e5) / 10)
      },
    }).finally(() => line.end())
    if (o.json === '-') await io.out(reportText(report))
    else {
      if (o.json !== undefined) await writeAtomic(o.json, reportText(report))
      await io.out(summaryText(skid, report, tallies))
    }
    return 0
  },
}

/** The record of a run again, or with other settings laid over its skid file. */
async function analyseOne(file: string, o: ReturnType<typeof options>, io: Io): Promise<number> {
  const own = (['skid', 'from', 'to', 'start', 'events', 'baseline'] as const).find((name) => o[name] !== undefined)
  if (own !== undefined)
    throw new MonitorError('USAGE', `--${own} does not go with a record`, {
      hint: 'the record of a run holds its skid file, times and acts',
    })
  const text = o.settings === undefined ? null : (await readText(o.settings)).toString('utf8')
  const { skid, report } = await analyseRecord(file, (skidText, name) => {
    const skid = loadSkid(skidText, name)
    if (text === null) return skid
    const other = readSettings(skid, text, o.settings!)
    if (other.acts.length > 0)
      throw new MonitorError('USAGE', 'versions of settings do not go with a record', {
        hint: 'a record has its own; detection and limits may be given',
      })
    return other.skid
  })
  if (o.json === '-') await io.out(reportText(report))
  else {
    if (o.json !== undefined) await writeAtomic(o.json, reportText(report))
    await io.out(summaryText(skid, report, []))
  }
  return 0
}

async function* stdin(): AsyncGenerator<Uint8Array> {
  for await (const chunk of process.stdin) yield chunk as Uint8Array
}
