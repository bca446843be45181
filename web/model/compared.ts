import type { Band, ComparedRun } from '../../server/wire/index.ts'
import { fixed } from './format.ts'
import type { Point } from './series.ts'

/** Another run's segment as points on this run's time: both begin at their own zero. */
export function laidOver(
  here: ComparedRun,
  there: ComparedRun,
): { readonly name: string; readonly ratio: Point[]; readonly dpBar: Point[] } {
  const points = (b: Band): Point[] =>
    there.x.map((hours, i) => ({
      x: here.zeroMs + hours * 3_600_000,
      y: b.mean[i] ?? null,
      low: b.min[i] ?? null,
      high: b.max[i] ?? null,
    }))
  return { name: `run ${there.run}`, ratio: points(there.ratio), dpBar: points(there.dpBar) }
}

/** What both stand on, in words: baseline and version of the tool. */
export const standsOn = (r: ComparedRun): string =>
  `run ${r.run}: ${r.baseline === null ? 'no baseline' : `${r.baseline.provisional ? 'provisional ' : ''}baseline ${fixed(r.baseline.dpBar, 2)} bar`}, version ${r.toolVersion}`
