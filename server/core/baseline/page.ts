import type { Skid } from '../skid.ts'
import type { CommissionedSegment, Commissioning } from './record.ts'

const n = (x: number | null, digits: number): string => (x === null ? '–' : x.toFixed(digits).replace('-', '−'))
const pad = (text: string, width: number): string => text.padStart(width)

/** The record as a page to sign: for each segment its levels, values, criteria with their reasons, and cautions. */
export function commissioningPage(skid: Skid, record: Commissioning): string {
  const lines = [
    `Clean step test of ${skid.title}`,
    record.from === null ? 'no readings' : `${record.from} to ${record.to}`,
    '',
    'Accepted values are what a run may start from (analyse --baseline). A segment is clean because a person says so: the test can tell',
    'that resistance stands still, not that nothing has been deposited before.',
  ]
  for (const s of record.segments) lines.push('', ...segmentLines(skid, s))
  const count = (v: string) => record.segments.filter((s) => s.verdict === v).length
  lines.push(
    '',
    `${record.segments.length} segments: ${count('accepted')} accepted, ${count('not accepted')} not accepted, ${count('not enough data')} without enough data.`,
    'Advisory tool, no safety function. Limits of acceptance are the tool’s defaults, not reviewed for this site.',
    '',
    'Segments were clean and filled with the liquids of the skid file   [ ] yes   [ ] no',
    'Tested by ______________________   Date ______________   Signature ______________________',
    'Accepted by ____________________   Date ______________   Signature ______________________',
    '',
  )
  return lines.join('\n')
}

function segmentLines(skid: Skid, s: CommissionedSegment): string[] {
  const title = skid.segments.find((g) => g.id === s.segment)?.title ?? ''
  const lines = [`${s.segment} ${title}: ${s.verdict.toUpperCase()}`]
  if (s.levels.length > 0) {
    lines.push('  from                      steps  flow [mL/min]   T [°C]   ΔP [bar]       Re   off fit [%]')
    for (const l of s.levels)
      lines.push(
        `  ${l.from}  ${pad(String(l.steps), 5)}  ${pad(n(l.flowMlMin, 1), 13)}  ${pad(n(l.tempC, 1), 7)}  ${pad(n(l.dpBar, 4), 9)}  ${pad(n(l.re, 0), 7)}  ${pad(n(l.residualPct, 2), 12)}`,
      )
  }
  if (s.exponent !== null)
    lines.push(
      `  ΔP ∝ Q^n, n = ${n(s.exponent.n, 3)} (${n(s.exponent.low, 3)} to ${n(s.exponent.high, 3)}, 95 %), ${n(s.exponent.over, 3)} above that of the hydraulics`,
    )
  if (s.twoTerms !== null)
    lines.push(
      `  ΔP = a μ Q + b ρ Q²: a ${s.twoTerms.a.toExponential(3)} 1/m³, b ${s.twoTerms.b.toExponential(3)} 1/m⁴, ${n(100 * s.twoTerms.linearShare, 0)} % of the first at the middle flow, off by ${n(s.twoTerms.residualPct, 2)} % at most`,
    )
  if (s.hydraulics !== null) {
    const bore = s.hydraulics.boreMm === null ? '' : `; a bore of ${n(s.hydraulics.boreMm, 3)} mm`
    const visc =
      s.hydraulics.viscosityFactor === null
        ? ''
        : `${bore === '' ? ';' : ', or'} a liquid ${n(s.hydraulics.viscosityFactor, 2)} times as viscous`
    lines.push(
      `  ΔP over the file’s: ${n(s.hydraulics.factor, 3)} ± ${n(2 * s.hydraulics.sd, 3)}${bore}${visc} would explain it alone`,
    )
  }
  if (s.ratio !== null)
    lines.push(`  ratio: σ ${n(100 * s.ratio.sigma, 2)} % a step, correlation with the step before ${n(s.ratio.correlation, 2)}`)
  const word = { accepted: 'accepted       ', 'not accepted': 'NOT ACCEPTED   ', 'not enough data': 'not enough data' }
  for (const c of s.criteria) lines.push(`  ${word[c.verdict]}  ${c.id.padEnd(10)}  ${c.reason}`)
  for (const c of s.cautions) lines.push(`  caution: ${c}`)
  return lines
}
