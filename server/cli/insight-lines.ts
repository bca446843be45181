import type { OutletReport, Report, SegmentReport } from '../core/report.ts'

const percent = (share: number): string => `${Number((100 * share).toPrecision(2))} %`

/** What would show the ratio, and how much of the lithium hydroxide made must have stayed for it. */
function depositLines(s: SegmentReport): string[] {
  const d = s.deposit
  if (d === null) return []
  const film = d.readings.find((r) => r.kind === 'uniform')
  const local = d.readings.find((r) => r.kind === 'local')
  const plugged = d.readings.filter((r) => r.kind === 'plugged-branch').length > 0
  const lines: string[] = []
  if (film != null && film.thicknessMm !== null && local != null && local.lengthShare !== null)
    lines.push(
      `${s.segment}: ratio ${d.ratio.toFixed(3)} (${d.low.toFixed(3)} to ${d.high.toFixed(3)}) is an even film of ${film.thicknessMm.toPrecision(2)} mm, or a bore narrowed to ${percent(local.boreRatio)} over ${percent(local.lengthShare)} of the length${plugged ? ', or a plugged branch' : ''}; one pressure drop does not tell which`,
    )
  const c = d.capture
  if (c !== null)
    lines.push(
      c.share > 1
        ? `${s.segment}: the water given makes ${c.solidMlPerHour.toPrecision(2)} mL of lithium hydroxide an hour, an even film would need ${c.share.toPrecision(2)} times that: more water, a loose or local deposit, or another solid`
        : `${s.segment}: as an even film it is ${percent(c.share)} of the lithium hydroxide that the water given makes (${c.solidMlPerHour.toPrecision(2)} mL an hour)`,
    )
  return lines
}

function outletLine(o: OutletReport, report: Report, time: (iso: string) => string): string {
  const kind = report.alarms.find((a) => a.id === o.alarm)?.kind ?? 'alarm'
  if (o.from === null) return `${kind} in ${o.segment}: what it touched has not come to the end of ${o.outlet} yet`
  const until =
    o.to === null ? ' on' : ` to ${time(o.to)}${o.divertedMl === null ? '' : `, ${(o.divertedMl / 1000).toPrecision(3)} L`}`
  return `${kind} in ${o.segment}: what it touched leaves ${o.outlet} from ${time(o.from)}${until} (by volume, ${percent(o.epsilon)} left out at either end)`
}

/** The additions of a report as lines for the summary; empty where nothing is known. */
export function insightLines(report: Report, time: (iso: string) => string): string[] {
  const thick = report.streams.flatMap((s) =>
    s.viscosityFactor === null
      ? []
      : [
          `${s.stream} ${s.viscosityFactor.factor.toFixed(2)} (${s.viscosityFactor.low.toFixed(2)} to ${s.viscosityFactor.high.toFixed(2)})`,
        ],
  )
  return [
    ...(thick.length === 0 ? [] : [`viscosity over the solvent's, learnt on the baselines (90 %): ${thick.join(', ')}`]),
    ...report.segments.flatMap(depositLines),
    ...report.segments.flatMap((s) =>
      s.heat === null || s.heat.cleanUWM2K === null || s.heat.foulingM2KW === null
        ? []
        : [
            `${s.segment}: U ${s.heat.uWM2K.toFixed(0)} W/(m² K) (${s.heat.low.toFixed(0)} to ${s.heat.high.toFixed(0)}), ${s.heat.cleanUWM2K.toFixed(0)} when clean`,
          ],
    ),
    ...report.outlet.map((o) => outletLine(o, report, time)),
  ]
}
