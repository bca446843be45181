import type { AlarmReport, ForecastReport, OnsetReport, Report } from '../core/report.ts'
import type { Skid } from '../core/skid.ts'
import type { LogTally } from '../ingest/csv/read-log.ts'
import { insightLines } from './insight-lines.ts'
import { caution } from './run.ts'
import { settingsLines } from './settings-lines.ts'
import { tableText } from './table-text.ts'

/** What `analyse` prints: the run, each segment, alarms, advice, what was not used. Times in the skid's own zone with its offset. */
export function summaryText(skid: Skid, report: Report, tallies: readonly LogTally[]): string {
  const { run } = report
  const out: string[] = []
  const hours = run.from === null || run.to === null ? 0 : (Date.parse(run.to) - Date.parse(run.from)) / 3.6e6
  const clock = localClock(skid.timeZone, hours > 20)
  out.push(
    `${skid.title}: ${run.from === null ? 'no usable rows' : `${clock.full(run.from)} to ${clock.full(run.to!)}, ${hours.toFixed(2)} h, ${run.rows.total} rows, ${run.scans} scans`}`,
  )
  if (run.phaseInferred) out.push('The log names no phases: production is inferred from flows and temperatures.')
  out.push('')
  if (report.segments.length > 0) out.push(segmentTable(report, clock))
  if (report.segments.some((s) => s.baseline?.provisional)) out.push('* provisional: too little clean running for a final baseline')
  const settings = settingsLines(report, clock.time)
  if (settings.length > 0) out.push('', 'Settings changed:', ...settings.map((l) => `  ${l}`))
  out.push('', `Alarms: ${report.alarms.length}`)
  if (report.alarms.length > 0)
    out.push(
      tableText(
        ['raised', 'cleared', 'priority', 'kind', 'cause', 'what'],
        report.alarms.map((a) => alarmRow(a, clock)),
      ),
    )
  if (report.advice.length > 0)
    out.push(
      '',
      'Advised, under the site’s own procedure:',
      ...report.advice.map((a) => `  ${clock.time(a.at)}  ${a.action.padEnd(13)} ${clock.within(a.reason)}`),
    )
  const computed = insightLines(report, clock.time)
  if (computed.length > 0)
    out.push('', 'Computed beside it, from the skid file and the readings:', ...computed.map((l) => `  ${l}`))
  const notUsed = notUsedOf(report, tallies)
  if (notUsed.length > 0) out.push('', 'Not used or assumed:', ...notUsed.map((n) => `  ${n}`))
  return `${out.join('\n')}\n\n${caution}`
}

function segmentTable(report: Report, clock: Clock): string {
  return tableText(
    ['segment', 'clean ΔP [bar]', 'ratio now', 'ratio max', 'began (90 %)', 'growth [1/h]', 'limit met (80 %)'],
    report.segments.map((s) => [
      s.segment,
      s.baseline === null ? '–' : `${s.baseline.dpBar.toFixed(3)}${s.baseline.provisional ? ' *' : ''}`,
      ratio(s.ratio.last),
      ratio(s.ratio.max),
      interval(s.onset, clock),
      s.growthPerHour === null ? '–' : s.growthPerHour.toFixed(3),
      limit(s.forecast, report.run.to, clock),
    ]),
  )
}

type Clock = ReturnType<typeof localClock>
const ratio = (r: number | null): string => (r === null ? '–' : r.toFixed(3))
const interval = (o: OnsetReport | null, c: Clock): string =>
  o === null ? '–' : `${c.time(o.at)} (${c.time(o.low)} to ${c.time(o.high)})`
const limit = (f: ForecastReport | null, to: string | null, c: Clock): string =>
  f === null ? '–' : to !== null && f.high <= to ? 'is met' : `${c.time(f.low)} to ${c.time(f.high)}`
const alarmRow = (a: AlarmReport, c: Clock): string[] => [
  c.time(a.raised),
  a.cleared === null ? 'stands' : c.time(a.cleared),
  a.priority,
  a.kind,
  a.cause ?? '–',
  c.within(a.message),
]

function notUsedOf(report: Report, tallies: readonly LogTally[]): string[] {
  const r = report.run.rows
  const out: string[] = []
  if (r.repeated > 0) out.push(`${r.repeated} repeated rows`)
  if (r.late > 0) out.push(`${r.late} rows that came after their scan had closed (of ${r.outOfOrder} out of order)`)
  if (r.badTime > 0) out.push(`${r.badTime} rows whose time lay far from their neighbours`)
  for (const t of tallies) if (t.skippedHour > 0) out.push(`${t.name}: ${t.skippedHour} times in the hour that spring skips`)
  for (const t of report.run.tags) {
    const why = Object.entries(t.reasons).filter(([k]) => k !== 'late' && k !== 'duplicate')
    if (why.length > 0) out.push(`${t.tag}: ${why.map(([k, n]) => `${n} ${k.replaceAll('-', ' ')}`).join(', ')} of ${t.samples}`)
  }
  return [...out, ...report.notes]
}

/** Times of the zone: HH:mm:ss, in a run longer than most of a day with month and day before it, and in full with date and offset; instants inside a text are put into the zone too. */
function localClock(timeZone: string, dated: boolean) {
  const part = (options: Intl.DateTimeFormatOptions) => new Intl.DateTimeFormat('en-GB', { timeZone, hourCycle: 'h23', ...options })
  const time = part({ hour: '2-digit', minute: '2-digit', second: '2-digit' })
  const date = part({ year: 'numeric', month: '2-digit', day: '2-digit' })
  const offset = new Intl.DateTimeFormat('en-GB', { timeZone, timeZoneName: 'longOffset' })
  const full = (iso: string): string => {
    const d = new Date(iso)
    const [day, month, year] = date.format(d).split('/')
    const zone =
      offset
        .formatToParts(d)
        .find((p) => p.type === 'timeZoneName')
        ?.value.replace('GMT', '') || '+00:00'
    return `${year}-${month}-${day} ${time.format(d)} ${zone}`
  }
  const short = (iso: string): string => {
    const [day, month] = dated ? date.format(new Date(iso)).split('/') : []
    return `${dated ? `${month}-${day} ` : ''}${time.format(new Date(iso))}`
  }
  return { time: short, full, within: (text: string) => text.replace(/\d{4}-\d{2}-\d{2}T[\d:.]+Z/g, short) }
}
