import type { LineFit } from './exponent-fit.ts'
import type { Criterion, Verdict } from './record.ts'
import { type Found, stretchRules } from './stretches.ts'

/**
 * Acceptance of a step test. zero: within 3 u of the taps. levels: at least 3 flows, each 5 % from the next, the largest 1.25 times the least. steady: no drift
 * over 1 % that stands 3 standard errors out, and a level visited again within 1 %. exponent: within 1 to 2 by its 95 % interval, residual at most 2 %, its
 * sd below 0.05, which is what a run without a test begins with. hydraulics: within a factor of 1.5 of the file's. Project's choice but for the first (common practice).
 */
const acceptance = {
  zeroU: 3,
  levels: 3,
  apart: 0.05,
  span: 1.25,
  drift: 0.01,
  driftSe: 3,
  residual: 0.02,
  exponentSd: 0.05,
  factor: 1.5,
} as const

export interface Facts {
  readonly zero: { readonly pa: number; readonly sdPa: number; readonly steps: number } | null
  readonly uPa: number | null
  readonly levels: readonly {
    readonly flowM3S: number
    readonly mean: number
    readonly sd: number
    readonly lnFlow: number
    readonly uncertain: boolean
  }[]
  readonly found: Found
  readonly exponent: LineFit | null
  readonly ratio: { readonly drift: number; readonly driftSe: number } | null
  readonly hydraulics: { readonly factor: number } | null
  readonly reynolds: { readonly low: number; readonly high: number; readonly transitional: boolean } | null
  /** Its outlet pressure is not measured but taken as held. */
  readonly held: boolean
  readonly hasChannel: boolean
  readonly hasTemperature: boolean
}

const pct = (x: number, digits = 1): string => `${(100 * x).toFixed(digits)} %`
const criterion = (id: Criterion['id'], verdict: Verdict, reason: string): Criterion => ({ id, verdict, reason })

/** Every criterion with its reason, the worst of them, and what to bear in mind. */
export function judge(f: Facts): { verdict: Verdict; criteria: Criterion[]; cautions: string[] } {
  const criteria = [zeroCriterion(f), levelsCriterion(f), steadyCriterion(f), exponentCriterion(f), ...hydraulicsCriterion(f)]
  const has = (v: Verdict) => criteria.some((c) => c.verdict === v)
  const cautions: string[] = []
  if (f.reynolds?.transitional)
    cautions.push(
      `Re ${f.reynolds.low.toFixed(0)} to ${f.reynolds.high.toFixed(0)} touches 2000 to 4000, between laminar and turbulent in a straight bore: no single exponent holds there`,
    )
  if (f.held) cautions.push('the outlet pressure is not measured: whatever its regulator does with flow is in the exponent')
  if (!f.hasTemperature)
    cautions.push('no thermometer in this segment: levels at different temperatures cannot be told from different flows')
  if (!f.hasChannel) cautions.push('no channel in the skid file: nothing to hold the clean pressure drop against')
  if (distinct(f.levels).length === f.levels.length && f.levels.length > 0)
    cautions.push('no flow was visited twice: a deposit or drift between levels would show in the exponent')
  return {
    verdict: has('not accepted') ? 'not accepted' : has('not enough data') ? 'not enough data' : 'accepted',
    criteria,
    cautions,
  }
}

function zeroCriterion({ zero, uPa }: Facts): Criterion {
  if (zero === null)
    return criterion('zero', 'not enough data', `no standstill of ${stretchRules.least} steps with both pressures readable`)
  const is = `${(zero.pa / 100).toFixed(1)} mbar at standstill`
  if (uPa === null)
    return criterion('zero', 'not enough data', `${is}; the range of a tap is missing, so nothing to hold it against`)
  const limit = acceptance.zeroU * uPa
  return Math.abs(zero.pa) <= limit
    ? criterion('zero', 'accepted', `${is}, within ${(limit / 100).toFixed(0)} mbar (3 u)`)
    : criterion(
        'zero',
        'not accepted',
        `${is}, beyond ${(limit / 100).toFixed(0)} mbar (3 u): check zero, head and trapped pressure`,
      )
}

/** Levels that differ in flow, each with all its visits. */
function distinct<L extends { readonly flowM3S: number }>(levels: readonly L[]): L[][] {
  const groups: L[][] = []
  for (const l of [...levels].sort((a, b) => a.flowM3S - b.flowM3S)) {
    const last = groups.at(-1)
    if (last !== undefined && l.flowM3S <= last[0]!.flowM3S * (1 + acceptance.apart)) last.push(l)
    else groups.push([l])
  }
  return groups
}

function levelsCriterion({ levels, found }: Facts): Criterion {
  const groups = distinct(levels)
  if (groups.length < acceptance.levels)
    return criterion(
      'levels',
      'not enough data',
      `${groups.length} steady flow${groups.length === 1 ? '' : 's'} of ${stretchRules.least} steps found, ${acceptance.levels} are needed${found.longestShort > 0 ? `; the longest that was too short had ${found.longestShort}` : ''}`,
    )
  const span = groups.at(-1)![0]!.flowM3S / groups[0]![0]!.flowM3S
  return span < acceptance.span
    ? criterion('levels', 'not enough data', `largest flow only ${span.toFixed(2)} times the least, ${acceptance.span} is needed`)
    : criterion('levels', 'accepted', `${groups.length} flows, the largest ${span.toFixed(2)} times the least`)
}

function steadyCriterion({ levels, ratio }: Facts): Criterion {
  if (ratio === null || levels.length === 0) return criterion('steady', 'not enough data', 'no steady flow to judge by')
  const said = `drift ${pct(ratio.drift)} over the test (± ${pct(2 * ratio.driftSe)})`
  if (Math.abs(ratio.drift) > Math.max(acceptance.drift, acceptance.driftSe * ratio.driftSe))
    return criterion('steady', 'not accepted', `${said}: not clean, not settled, or an instrument moves`)
  for (const visits of distinct(levels)) {
    const low = visits.reduce((m, l) => Math.min(m, l.mean), Number.POSITIVE_INFINITY)
    const high = visits.reduce((m, l) => Math.max(m, l.mean), Number.NEGATIVE_INFINITY)
    const sd = Math.max(...visits.map((l) => l.sd))
    if (high - low > Math.max(acceptance.drift, acceptance.driftSe * Math.SQRT2 * sd))
      return criterion(
        'steady',
        'not accepted',
        `the same flow gave ${pct(high - low)} apart: not clean, not settled, or an instrument moves`,
      )
  }
  return criterion('steady', 'accepted', said)
}

function exponentCriterion({ exponent, levels }: Facts): Criterion {
  if (exponent === null || distinct(levels).length < acceptance.levels)
    return criterion('exponent', 'not enough data', 'needs three flows')
  const { slope, sd, residual } = exponent
  const said = `n = ${slope.toFixed(3)} ± ${(1.96 * sd).toFixed(3)} (95 %)`
  if (slope + 1.96 * sd < 1 || slope - 1.96 * sd > 2)
    return criterion('exponent', 'not accepted', `${said}, outside 1 to 2: check the zeros of ΔP and flow`)
  if (residual > acceptance.residual)
    return criterion('exponent', 'not accepted', `${said}, a level lies ${pct(residual)} off: no one power of flow`)
  if (levels.some((l) => l.uncertain))
    return criterion(
      'exponent',
      'not enough data',
      `${said}, but flow is between laminar and turbulent at one level at least, where no exponent holds`,
    )
  if (sd > acceptance.exponentSd)
    return criterion(
      'exponent',
      'not enough data',
      `${said}: wider than what the hydraulics alone promise; wider flow steps or a zero check help`,
    )
  return criterion('exponent', 'accepted', said)
}

function hydraulicsCriterion({ hydraulics, hasChannel }: Facts): Criterion[] {
  if (!hasChannel) return []
  if (hydraulics === null)
    return [criterion('hydraulics', 'not enough data', 'needs a steady flow, a liquid and a channel that is complete')]
  const { factor } = hydraulics
  const said = `ΔP is ${factor.toFixed(2)} times what bore and liquids of the file give`
  return factor > acceptance.factor || factor < 1 / acceptance.factor
    ? [
        criterion(
          'hydraulics',
          'not accepted',
          `${said}, beyond ${acceptance.factor}: check bore, length, branches, liquid, units, and whether it is clean`,
        ),
      ]
    : [criterion('hydraulics', 'accepted', said)]
}
