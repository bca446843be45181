import { readdir, readFile } from 'node:fs/promises'
import { basename, join } from 'node:path'
import { MonitorError } from '../core/errors.ts'
import type { Report } from '../core/report.ts'
import type { Truth } from '../core/sim/truth.ts'
import type { Skid } from '../core/skid.ts'
import { compareCut, cutsOf, type LookAheadScore } from './look-ahead.ts'
import { type CaseScore, scoreCase } from './score.ts'
import { type Summary, summarise } from './summary.ts'
import { readTruth } from './truth-file.ts'

/** A folder with one logged run and its truth. */
export interface CaseFiles {
  readonly name: string
  readonly dir: string
  readonly skidFile: string
  readonly logFile: string
  readonly truthFile: string
}

export interface ScoreDeps {
  loadSkid(text: string, file: string): Skid
  /** The whole log through the pipeline; with `cutMs`, as if the log had ended there. */
  analyse(files: CaseFiles, skid: Skid, options: { readonly cutMs: number | null }): Promise<Report>
  /** Called before each case. */
  progress?(done: number, total: number, name: string): void
  readonly signal?: AbortSignal
}

export interface ScoreRun {
  readonly score: 1
  readonly dir: string
  readonly summary: Summary
  readonly lookAhead: readonly LookAheadScore[]
  /** Cases that could not be read or analysed; the others are scored all the same. */
  readonly failed: readonly { readonly case: string; readonly code: string; readonly message: string }[]
  readonly cases: readonly CaseScore[]
}

const skidNames = ['skid.json', 'skid.yaml', 'skid.yml']

/** The cases in a folder: its subfolders that hold a truth.json, by name; or the folder itself. Errors: SCORE_CASE, FILE_READ. */
export async function findCases(dir: string): Promise<CaseFiles[]> {
  const list = async (path: string) => {
    try {
      return await readdir(path, { withFileTypes: true })
    } catch (cause) {
      throw new MonitorError('FILE_READ', 'cannot read the folder', {
        place: { file: path },
        hint: 'give a folder of cases',
        cause,
      })
    }
  }
  const caseIn = (path: string, names: readonly string[]): CaseFiles | null => {
    if (!names.includes('truth.json')) return null
    const skid = skidNames.find((n) => names.includes(n)) ?? skidNames[0]!
    return {
      name: basename(path),
      dir: path,
      skidFile: join(path, skid),
      logFile: join(path, 'run.csv'),
      truthFile: join(path, 'truth.json'),
    }
  }
  const here = await list(dir)
  const own = caseIn(
    dir,
    here.map((e) => e.name),
  )
  if (own !== null) return [own]
  const found: CaseFiles[] = []
  for (const entry of here.filter((e) => e.isDirectory()).sort((a, b) => (a.name < b.name ? -1 : 1))) {
    const path = join(dir, entry.name)
    const one = caseIn(
      path,
      (await list(path)).map((e) => e.name),
    )
    if (one !== null) found.push(one)
  }
  if (found.length === 0) {
    throw new MonitorError('SCORE_CASE', 'no case found', {
      place: { file: dir },
      hint: 'expected folders that hold skid.json (or skid.yaml), run.csv and truth.json',
    })
  }
  return found
}

const textOf = async (file: string): Promise<string> => {
  try {
    return await readFile(file, 'utf8')
  } catch (cause) {
    throw new MonitorError('SCORE_CASE', `cannot read: ${cause instanceof Error ? cause.message : String(cause)}`, {
      place: { file },
      cause,
    })
  }
}

/**
 * Scores every case of a folder. `lookAheadCases` of them (spread evenly) are analysed again with the log cut at two random places.
 * A case that fails is named in `failed` with its reason; the rest is scored.
 */
export async function scoreFolder(
  dir: string,
  deps: ScoreDeps,
  options: { readonly lookAheadCases: number; readonly seed: number },
): Promise<ScoreRun> {
  const cases = await findCases(dir)
  const scores: CaseScore[] = []
  const lookAhead: LookAheadScore[] = []
  const failed: { case: string; code: string; message: string }[] = []
  const every = options.lookAheadCases === 0 ? Number.POSITIVE_INFINITY : Math.max(1, cases.length / options.lookAheadCases)
  for (const [i, files] of cases.entries()) {
    deps.signal?.throwIfAborted()
    deps.progress?.(i, cases.length, files.name)
    try {
      const truth: Truth = readTruth(await textOf(files.truthFile), files.truthFile)
      const skid = deps.loadSkid(await textOf(files.skidFile), files.skidFile)
      const report = await deps.analyse(files, skid, { cutMs: null })
      scores.push({ ...scoreCase(truth, report, skid), case: files.name })
      if (Math.floor(i / every) !== Math.floor((i - 1) / every)) {
        const marginMs = (2 * skid.scanSeconds + skid.lateSeconds) * 1000
        for (const cutMs of cutsOf(files.name, Date.parse(truth.from), Date.parse(truth.to), 2, options.seed)) {
          lookAhead.push(compareCut(files.name, report, await deps.analyse(files, skid, { cutMs }), cutMs, marginMs))
        }
      }
    } catch (error) {
      if (!(error instanceof MonitorError)) throw error
      failed.push({ case: files.name, code: error.code, message: error.line() })
    }
  }
  return { score: 1, dir: basename(dir), summary: summarise(scores), lookAhead, failed, cases: scores }
}
