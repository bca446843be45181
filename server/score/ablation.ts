import { analyseLog, fileSource } from '../analyse.ts'
import { bankSettings } from '../core/bank/bank-state.ts'
import type { Kind } from '../core/bank/hypotheses.ts'
import type { PipelineOptions } from '../core/pipeline/pipeline.ts'
import { loadSkid } from '../skid/check.ts'
import type { Figure } from './figures.ts'
import { scoreFolder } from './run.ts'

const { disturbances: d, kinds } = bankSettings
const without = (...gone: Kind[]): Kind[] => kinds.filter((k) => !gone.includes(k))
/** As good as none; 0 would make an onset fit without noise. */
const none = 1e-6

/** What is taken away, one at a time: an idea of the bank by its disturbances set to none and its explanations left out. */
export const parts: readonly { readonly name: string; readonly options: PipelineOptions }[] = [
  { name: 'everything', options: {} },
  { name: 'no rival explanations', options: { bank: { ...bankSettings, kinds: ['deposit'] } } },
  {
    name: 'no taps',
    options: {
      bank: {
        ...bankSettings,
        kinds: without('tap-ramp', 'tap-step'),
        disturbances: { ...d, tapWalkPa: 0, tapDriftingWalkPa: 0, tapGain: 0 },
      },
    },
  },
  {
    name: 'no streams',
    options: { bank: { ...bankSettings, kinds: without('stream'), disturbances: { ...d, meter: 0, viscosityWalk: 0 } } },
  },
  { name: 'no wander', options: { bank: { ...bankSettings, disturbances: { ...d, wander: none, wanderPa: 0 } } } },
  {
    name: 'exponents not learnt',
    options: {
      bank: {
        ...bankSettings,
        disturbances: {
          ...d,
          coilAndFittings: 0,
          zeroOffsetPa: 0,
          zeroOffsetCheckedPa: 0,
          viscositySlope: 0,
          viscositySlopeOneThermocouple: 0,
        },
      },
    },
  },
  {
    name: 'any size believed',
    options: { bank: { ...bankSettings, believable: { ...bankSettings.believable, tapShare: 1e6, stream: 1e6, step: 1e6 } } },
  },
  { name: 'no charts', options: { charts: false } },
]

/** Columns of the table: a figure of `score` by its id, and its head. */
export const columns = [
  ['found', 'found %'],
  ['rightSegment', 'right segment %'],
  ['riseAtAlarm', 'rise at alarm'],
  ['falseFouling', 'false /1000 h'],
  ['foulingLike', 'with other causes'],
  ['onset.raised.median', 'onset error'],
  ['onset.raised.coverage', 'covers %'],
  ['forecast.50.median', 'forecast error'],
  ['otherCause', 'cause right %'],
  ['falseSensors', 'sensor /1000 h'],
  ['ratioError.median', 'ratio error'],
  ['ratioError.p95', 'p95'],
] as const

const shown = (f: Figure | undefined): string =>
  f === undefined || f.value === null ? '–' : Number((f.unit === 'share' ? 100 * f.value : f.value).toPrecision(3)).toString()

/** Scores a folder once with everything and once without each part; a table for people, Markdown. Errors: those of `score`. */
export async function ablation(dir: string, signal: AbortSignal, progress: (name: string) => void): Promise<string> {
  const rows: string[][] = [['', ...columns.map(([, head]) => head)]]
  let head = ''
  for (const { name, options } of parts) {
    progress(name)
    const run = await scoreFolder(
      dir,
      {
        loadSkid,
        analyse: async (files, skid, { cutMs }) =>
          (await analyseLog({ skid, sources: [fileSource(files.logFile)], toMs: cutMs, pipeline: options })).report,
        signal,
        progress: () => undefined,
      },
      { lookAheadCases: 0, seed: 1 },
    )
    const { summary } = run
    head = `${summary.cases} cases, ${summary.hours.production.toFixed(1)} h producing, ${summary.hours.inControl.toFixed(1)} h in control`
    rows.push([name, ...columns.map(([id]) => shown(summary.figures.find((f) => f.id === id)))])
  }
  const line = (cells: readonly string[]) => `| ${cells.join(' | ')} |`
  return [head, '', line(rows[0]!), line(rows[0]!.map(() => '---')), ...rows.slice(1).map(line), ''].join('\n')
}
