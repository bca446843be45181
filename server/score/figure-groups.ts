import { type Figure, quantileFigure, share } from './figures.ts'
import type { EventScore, ForecastScore, IntervalScore } from './fouling.ts'

export const given = <T>(items: readonly (T | null)[]): T[] => items.filter((x) => x !== null)

/** Targets of the project, beside each figure; where none is set the figure stands alone. */
export function onsetFigures(
  id: string,
  title: string,
  scores: readonly (IntervalScore | null)[],
  found: number,
  targets: { median: number; p90: number; width: number | null },
): Figure[] {
  const have = given(scores)
  const errors = have.map((s) => s.error)
  return [
    share(`${id}.given`, `${title}: given`, have.length, found),
    quantileFigure(`${id}.median`, `${title}: error, median`, 'of onset to limit', errors, 0.5, targets.median),
    quantileFigure(`${id}.p90`, `${title}: error, p90`, 'of onset to limit', errors, 0.9, targets.p90),
    share(`${id}.coverage`, `${title}: interval covers`, have.filter((s) => s.covered).length, have.length, [0.86, 0.95]),
    quantileFigure(
      `${id}.width`,
      `${title}: interval width, median`,
      'of onset to limit',
      have.map((s) => s.width),
      0.5,
      targets.width,
    ),
  ]
}

export function forecastFigures(percent: number, all: readonly ForecastScore[], held: boolean): Figure[] {
  const at = all.filter((f) => f.fraction === percent / 100)
  const have = at.filter((f): f is ForecastScore & IntervalScore => f.given)
  const id = `forecast.${percent}`
  const title = `forecast at ${percent} %`
  return [
    share(`${id}.given`, `${title}: given`, have.length, at.length, held ? 0.95 : null),
    quantileFigure(
      `${id}.median`,
      `${title}: error, median`,
      'of time left',
      have.map((f) => f.error),
      0.5,
      held ? 0.22 : null,
    ),
    share(
      `${id}.coverage`,
      `${title}: 80 % interval covers`,
      have.filter((f) => f.covered).length,
      have.length,
      held ? [0.76, 0.86] : null,
    ),
    quantileFigure(
      `${id}.width`,
      `${title}: interval width, median`,
      'of time left',
      have.map((f) => f.width),
      0.5,
      held ? 0.9 : null,
    ),
  ]
}

export function ratioFigures(events: readonly EventScore[]): Figure[] {
  const spans: readonly [id: string, title: string, from: number, to: number, target: number][] = [
    ['under1h', 'under 1 h', 0, 1, 1.05],
    ['1to4h', '1 to 4 h', 1, 4, 1.035],
    ['over4h', 'over 4 h', 4, Number.POSITIVE_INFINITY, 1.025],
  ]
  return spans.map(([id, title, from, to, target]) =>
    quantileFigure(
      `ratioAtAlarm.${id}`,
      `true ratio at first alarm, median, limit in ${title}`,
      'ratio',
      given(events.filter((e) => e.hoursToLimit >= from && e.hoursToLimit < to).map((e) => e.trueRatio)),
      0.5,
      target,
    ),
  )
}
