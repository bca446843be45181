import type { Skid } from '../skid.ts'
import { paFromBar } from '../units.ts'
import type { StartingKnowledge } from './starting-knowledge.ts'

export type Verdict = 'accepted' | 'not accepted' | 'not enough data'
export type CriterionId = 'zero' | 'levels' | 'steady' | 'exponent' | 'hydraulics'

export interface Criterion {
  readonly id: CriterionId
  readonly verdict: Verdict
  readonly reason: string
}

/** A logged step test as judged; times RFC 3339 UTC, null where not known. What a run may start from, and a page to sign. */
export interface Commissioning {
  readonly commissioning: 1
  readonly skid: string
  readonly from: string | null
  readonly to: string | null
  readonly segments: readonly CommissionedSegment[]
}

export interface CommissionedSegment {
  readonly segment: string
  /** The worst of its criteria. */
  readonly verdict: Verdict
  readonly criteria: readonly Criterion[]
  /** ΔP at standstill less the head of the liquid, its sd, and the standard uncertainty u of the taps it is held against. */
  readonly zero: { readonly mbar: number; readonly sdMbar: number; readonly uMbar: number | null; readonly steps: number } | null
  readonly levels: readonly {
    readonly from: string
    readonly to: string
    readonly steps: number
    readonly flowMlMin: number
    readonly tempC: number
    /** Without head and zero. */
    readonly dpBar: number
    readonly re: number | null
    /** Distance from the fitted power of flow, % of ΔP. */
    readonly residualPct: number | null
  }[]
  /** ΔP ∝ Q^n, n within 1 to 2, low to high 95 %; `over`: how far n lies above that of the hydraulics, with its sd. */
  readonly exponent: {
    readonly n: number
    readonly low: number
    readonly high: number
    readonly residualPct: number
    readonly over: number
    readonly sd: number
  } | null
  /** ΔP = a μ Q + b ρ Q² in SI: a 1/m3, b 1/m4; the share of the first term at the middle level. */
  readonly twoTerms: { readonly a: number; readonly b: number; readonly residualPct: number; readonly linearShare: number } | null
  readonly reynolds: { readonly low: number; readonly high: number; readonly transitional: boolean } | null
  /** ΔP over that of the file's bore and liquids, fittings left out; the bore, or else the viscosity factor, that would explain it alone. */
  readonly hydraulics: {
    readonly factor: number
    readonly sd: number
    readonly boreMm: number | null
    readonly viscosityFactor: number | null
  } | null
  /** Of ln ratio per detector step: sd, correlation with the step before; drift over the whole test with its standard error, %. */
  readonly ratio: {
    readonly sigma: number
    readonly correlation: number
    readonly driftPct: number
    readonly driftSePct: number
  } | null
  readonly cautions: readonly string[]
}

/** What of a record a run may start from: only what was accepted. Segments the skid does not have are left out. */
export function knowledgeOf(record: Commissioning, skid: Skid): StartingKnowledge[] {
  return record.segments
    .filter((s) => skid.segments.some((g) => g.id === s.segment))
    .map((s) => {
      const accepted = (...ids: CriterionId[]) => ids.every((id) => s.criteria.some((c) => c.id === id && c.verdict === 'accepted'))
      return {
        segment: s.segment,
        zeroPa: s.zero !== null && accepted('zero') ? paFromBar(s.zero.mbar / 1000) : null,
        flowExponent:
          s.exponent !== null && accepted('levels', 'steady', 'exponent') ? { over: s.exponent.over, sd: s.exponent.sd } : null,
      }
    })
}
