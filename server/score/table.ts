import type { Figure } from './figures.ts'
import type { ScoreRun } from './run.ts'

const trim = (x: number, digits: number) => Number(x.toPrecision(digits)).toString()

/** A figure in the unit it is read in: shares in %, ratios to four digits, the rest to three. */
function shown(unit: Figure['unit'], x: number): string {
  if (unit === 'share') return trim(100 * x, 3)
  return trim(x, unit === 'ratio' && x >= 0.5 ? 4 : 3)
}

const unitShown: Record<Figure['unit'], string> = {
  share: '%',
  ratio: 'ratio',
  'per 1000 h': 'per 1000 h',
  s: 's',
  'of onset to limit': 'of onset to limit',
  'of time left': 'of time left',
}

function row(f: Figure): readonly string[] {
  const value = f.value === null ? '-' : shown(f.unit, f.value)
  const interval = f.interval === null ? '' : `${shown(f.unit, f.interval.low)} to ${shown(f.unit, f.interval.high)}`
  const target =
    f.target === null
      ? ''
      : typeof f.target === 'number'
        ? shown(f.unit, f.target)
        : `${shown(f.unit, f.target[0])}-${shown(f.unit, f.target[1])}`
  return [
    f.title,
    value,
    unitShown[f.unit],
    f.hours === null ? `${f.n}` : `${f.n} in ${f.hours.toFixed(1)} h`,
    interval,
    target,
    f.verdict ?? '',
  ]
}

/** Columns padded to their widest cell; numbers to the right. */
function columns(rows: readonly (readonly string[])[], right: readonly number[]): string[] {
  const widths = rows[0]!.map((_, i) => Math.max(...rows.map((r) => r[i]!.length)))
  return rows.map((r) =>
    r
      .map((cell, i) => (right.includes(i) ? cell.padStart(widths[i]!) : cell.padEnd(widths[i]!)))
      .join('  ')
      .trimEnd(),
  )
}

/** The score as text: figures with their counts, 95 % intervals, targets and verdicts; then what to look at. */
export function scoreTable(run: ScoreRun): string {
  const s = run.summary
  const head = ['figure', 'value', 'unit', 'n', '95 % interval', 'target', 'verdict']
  const lines = [
    `${s.cases} cases, ${s.hours.log.toFixed(1)} h logged, ${s.hours.production.toFixed(1)} h producing, ${s.hours.inControl.toFixed(1)} h in control`,
    '',
    ...columns([head, ...s.figures.map(row)], [1]),
    '',
    `fouling alarms: ${Object.entries(s.foulingAlarms)
      .map(([k, n]) => `${n} ${k}`)
      .join(', ')}`,
  ]
  if (run.lookAhead.length > 0) {
    const same = run.lookAhead.filter((l) => l.same).length
    const compared = run.lookAhead.reduce((n, l) => n + l.compared, 0)
    lines.push(
      `look-ahead: ${same} of ${run.lookAhead.length} logs cut short gave the same earlier alarms (${compared} alarms compared)`,
    )
    lines.push(...run.lookAhead.filter((l) => !l.same).map((l) => `  ${l.case} cut at ${l.cutAt}: ${l.difference}`))
  }
  const listed = (title: string, items: readonly string[]) => {
    if (items.length > 0)
      lines.push(
        '',
        title,
        ...items.slice(0, 20).map((x) => `  ${x}`),
        ...(items.length > 20 ? [`  and ${items.length - 20} more (all in the JSON)`] : []),
      )
  }
  listed(
    'not found before the limit:',
    s.missed.map(
      (m) =>
        `${m.case} ${m.segment} onset ${m.onset}, limit in ${m.hoursToLimit.toFixed(2)} h, highest ratio ${trim(m.ratioMax, 4)}`,
    ),
  )
  listed(
    'false fouling alarms:',
    s.falseFouling.map((f) => `${f.case} ${f.segment ?? '-'} ${f.raised} named ${f.named ?? '-'}`),
  )
  listed(
    'false exotherm alarms:',
    s.falseExotherms.map((f) => `${f.case} ${f.raised}`),
  )
  listed(
    'cases that could not be scored:',
    run.failed.map((f) => `${f.case}: ${f.message}`),
  )
  return `${lines.join('\n')}\n`
}
