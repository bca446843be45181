import { parseArgs } from 'node:util'
import { analyseLog, fileSource } from '../analyse.ts'
import { MonitorError } from '../core/errors.ts'
import { type ScoreDeps, type ScoreRun, scoreFolder } from '../score/run.ts'
import { scoreTable } from '../score/table.ts'
import { loadSkid } from '../skid/check.ts'
import { writeAtomic } from './atomic-file.ts'
import type { Command } from './command.ts'
import { progressLine } from './progress-line.ts'

const help = `Usage: clearbore score DIR [--json OUT|-] [--no-look-ahead N] [--seed N]

Runs the pipeline over logged runs whose truth is known and prints how well it did: growths found before the limit, false
alarms per 1000 h, onset and forecast errors with the coverage of their intervals, exotherm delays, sensor faults, causes.

  DIR                 a folder of cases, each a folder with skid.json (or skid.yaml), run.csv and truth.json; or one case
  --json OUT          the figures, and what became of every event, as JSON into a file; '-' writes it to stdout instead of the table
  --no-look-ahead N   analyse N of the cases (spread evenly; default 4, 0 for none) again with the log cut at two random places each:
                      what was said before the cut must be the same
  --seed N            for those places (default 1)

Each figure stands with its count, a 95 % interval (shares: Wilson; rates: exact Poisson; quantiles: order statistics), the target
and whether it is met, missed by no more than chance allows (one-sided 5 %) or worse.
Exit code 0; 1 when a case could not be scored or a cut log told another story; 2 for a wrong command line.
`

/** The raw errors of the ratio are many and stand in the figures already. */
const asJson = (run: ScoreRun) =>
  `${JSON.stringify({ ...run, cases: run.cases.map(({ ratioErrors, ...rest }) => ({ ...rest, ratioErrors: ratioErrors.length })) }, (_, v) => (typeof v === 'number' ? Number(v.toPrecision(9)) : v), 1)}\n`

const wholeNumber = (text: string, option: string): number => {
  if (!/^\d{1,9}$/.test(text))
    throw new MonitorError('USAGE', `${option} needs a whole number, got '${text}'`, { hint: 'clearbore score --help' })
  return Number(text)
}

function options(args: readonly string[]) {
  try {
    const { values, positionals } = parseArgs({
      args: [...args],
      allowPositionals: true,
      options: {
        json: { type: 'string' },
        'no-look-ahead': { type: 'string', default: '4' },
        seed: { type: 'string', default: '1' },
      },
    })
    const [dir, ...more] = positionals
    if (dir === undefined || more.length > 0)
      throw new MonitorError('USAGE', 'score takes one folder', { hint: 'clearbore score DIR' })
    return {
      dir,
      json: values.json ?? null,
      lookAheadCases: wholeNumber(values['no-look-ahead'], '--no-look-ahead'),
      seed: wholeNumber(values.seed, '--seed'),
    }
  } catch (cause) {
    if (cause instanceof MonitorError) throw cause
    throw new MonitorError('USAGE', cause instanceof Error ? cause.message : String(cause), {
      hint: 'clearbore score --help',
      cause,
    })
  }
}

/** `score` over whatever analyses a case; the command of the command line hands in the pipeline itself. */
export const scoreCommandWith = (deps: Pick<ScoreDeps, 'analyse' | 'loadSkid'>): Command => ({
  name: 'score',
  summary: 'score the pipeline on runs with known truth',
  help,
  async run(args, io) {
    const o = options(args)
    let line: ReturnType<typeof progressLine> | null = null
    const run = await scoreFolder(
      o.dir,
      {
        ...deps,
        signal: io.signal,
        progress(done, total, name) {
          line ??= progressLine(io, 'score', total, 'cases')
          line.update(done, name)
        },
      },
      o,
    ).finally(() => line?.end())
    if (o.json === '-') await io.out(asJson(run))
    else {
      if (o.json !== null) await writeAtomic(o.json, asJson(run))
      await io.out(scoreTable(run))
    }
    for (const f of run.failed) io.err(`${f.message}\n`)
    return run.failed.length > 0 || run.lookAhead.some((l) => !l.same) ? 1 : 0
  },
})

export const scoreCommand: Command = scoreCommandWith({
  loadSkid,
  async analyse(files, skid, { cutMs }) {
    const { report } = await analyseLog({ skid, sources: [fileSource(files.logFile)], toMs: cutMs })
    return report
  },
})
