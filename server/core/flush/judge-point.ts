import { barFromPa, cFromK } from '../units.ts'
import type { CourseStep, Memory, Point, PointState, Rule } from './course-state.ts'

/** What a scan says, as the points ask for it. Null: bad, uncertain or missing; such a reading never makes a point met. */
export interface Readings {
  readonly endMs: number
  readonly seconds: number
  /** SI value of a tag by number; good readings only. */
  tag(tag: number): number | null
  /** ΔP of a segment by number, Pa. */
  dp(segment: number): number | null
  /** Ratio of a segment of the path with the liquid that fills it, against that liquid's clean reference. */
  ratio(segment: number, liquid: string): number | null
  /** Every flow of the path is known in this scan. */
  readonly flowKnown: boolean
  /** True while two liquids share the path. */
  readonly mixed: boolean
  /** Keys of alarms that stand on segments and speak against being in control. */
  alarms(segments: readonly string[]): readonly string[]
  name(tag: number): string
}

interface Saying {
  readonly ok: boolean | null
  readonly value: number | string | null
  readonly why: string
  /** Seconds it must last. */
  readonly holdS: number
}

const bad = (value: number | string | null, why: string): Saying => ({ ok: null, value, why, holdS: 0 })
const said = (ok: boolean, value: number | string | null, why: string, holdS = 0): Saying => ({ ok, value, why, holdS })

/** A rise of the ratio by this share while the leg is near or below 0 °C is called ice (practice: any rise); the noise of a low flow stays below it. */
const ice = { rise: 0.15, belowK: 275.15, forS: 20 } as const
/** Half-minute values kept to see whether a ratio is flat: three of them, two minutes, within this share. */
const flat = { beatS: 30, kept: 5, within: 0.03 } as const

function readAll(tags: readonly number[], r: Readings): { readonly values: readonly number[]; readonly lost: string | null } {
  const values: number[] = []
  for (const t of tags) {
    const v = r.tag(t)
    if (v === null) return { values, lost: r.name(t) }
    values.push(v)
  }
  return { values, lost: null }
}

/** A value each half minute, the newest last. */
function follow(m: Memory, value: number, seconds: number): void {
  m.beatS += seconds
  if (m.trail.length > 0 && m.beatS < flat.beatS) return
  m.beatS = 0
  m.trail.push(value)
  if (m.trail.length > flat.kept) m.trail.shift()
}

const isFlat = (m: Memory): boolean =>
  m.trail.length === flat.kept && Math.max(...m.trail) - Math.min(...m.trail) <= flat.within * Math.min(...m.trail)

function ask(rule: Exclude<Rule, null>, m: Memory, step: CourseStep, r: Readings): Saying {
  switch (rule.kind) {
    case 'flow-zero': {
      const q = r.tag(rule.tag)
      if (q === null) return bad(null, 'its flow reading is not good')
      const share = (2 * q) / rule.belowSi
      return said(q < rule.belowSi, share, q < rule.belowSi ? 'no flow' : 'still flows', rule.holdS)
    }
    case 'dp-zero': {
      const dp = r.dp(rule.segment)
      return dp === null
        ? bad(null, 'a pressure reading is not good')
        : said(
            Math.abs(dp) < rule.belowPa,
            barFromPa(dp),
            Math.abs(dp) < rule.belowPa ? 'no pressure drop' : 'pressure drop still there',
            rule.holdS,
          )
    }
    case 'volume':
      if (!r.flowKnown && step.passedMl < rule.ml)
        return bad(step.passedMl, 'a flow reading is not good; nothing is counted meanwhile')
      return said(
        step.passedMl >= rule.ml,
        step.passedMl,
        `${step.passedMl.toFixed(0)} of ${rule.ml.toFixed(0)} mL${step.withoutFlowS > 0 ? `; ${step.withoutFlowS.toFixed(0)} s without a flow reading not counted` : ''}`,
      )
    case 'heat-gone': {
      const [out, coolant] = [r.tag(rule.out), r.tag(rule.coolant)]
      if (out === null || coolant === null) return bad(null, `${r.name(out === null ? rule.out : rule.coolant)} is not good`)
      const over = out - coolant
      return said(Math.abs(over) <= rule.withinK, over, `outlet ${over >= 0 ? 'above' : 'below'} the coolant`, rule.holdS)
    }
    case 'warm': {
      const { values, lost } = readAll(rule.tags, r)
      if (lost !== null) return bad(null, `${lost} is not good; bad data is not warm`)
      const coldest = Math.min(...values)
      return said(coldest > rule.aboveK, cFromK(coldest), coldest > rule.aboveK ? 'warm' : 'too cold', rule.holdS)
    }
    case 'pressure-steady': {
      const { values, lost } = readAll(rule.tags, r)
      if (lost !== null) return bad(null, `${lost} is not good`)
      const highest = Math.max(...values)
      m.low = m.low === null ? highest : Math.min(m.low, highest)
      const rise = highest - m.low
      return said(rise <= rule.risePa, barFromPa(rise), 'rise over the lowest of this step')
    }
    case 'no-heat': {
      const { values, lost } = readAll(rule.tags, r)
      const coolant = rule.coolant === null ? 0 : r.tag(rule.coolant)
      if (lost !== null || coolant === null) return bad(null, `${lost ?? r.name(rule.coolant ?? 0)} is not good`)
      const over = Math.max(...values) - coolant
      m.low ??= over
      // Cooling towards the coolant lowers what a later rise counts from.
      m.low = Math.min(m.low, over)
      const rise = over - m.low
      return said(rise <= rule.riseK, rise, rise <= rule.riseK ? 'no heat' : 'temperature rises: hold advised')
    }
    case 'ratio': {
      if (r.mixed) return said(false, null, 'no verdict while two liquids share the path')
      const ratio = r.ratio(rule.segment, rule.liquid)
      if (ratio === null) return bad(null, 'flow too low for a verdict, or a reading behind it is not good')
      follow(m, ratio, r.seconds)
      if (ratio > rule.highest) return said(false, ratio, 'above clean')
      return rule.flat && !isFlat(m)
        ? said(false, ratio, 'still changing')
        : said(true, ratio, rule.flat ? 'flat' : 'clean', rule.holdS)
    }
    case 'no-ice': {
      const { values, lost } = readAll(rule.tags, r)
      if (lost !== null) return bad(null, `${lost} is not good`)
      const coldest = Math.min(...values)
      const ratio = r.mixed ? null : r.ratio(rule.segment, 'drying')
      if (ratio === null) return bad(cFromK(coldest), 'ΔP cannot be judged: flow too low, or a reading is not good')
      m.low = m.low === null ? ratio : Math.min(m.low, ratio)
      m.beatS = coldest < ice.belowK && ratio > m.low * (1 + ice.rise) ? m.beatS + r.seconds : 0
      if (m.beatS >= ice.forS) return said(false, cFromK(coldest), 'ice')
      return said(coldest <= rule.coldK, cFromK(coldest), coldest <= rule.coldK ? 'cold, no rise of ΔP' : 'not cold yet')
    }
    case 'flow-normal': {
      const q = r.tag(rule.tag)
      if (q === null) return bad(null, 'its flow reading is not good')
      const ok = q >= rule.lowSi && q <= rule.highSi
      return said(ok, (200 * q) / (rule.lowSi + rule.highSi), ok ? 'as before the flush' : 'not as before the flush', rule.holdS)
    }
    case 'temperature-normal': {
      const t = r.tag(rule.tag)
      if (t === null) return bad(null, `${r.name(rule.tag)} is not good`)
      const ok = Math.abs(t - rule.atK) <= rule.withinK
      return said(ok, cFromK(t), ok ? 'as before the flush' : 'not as before the flush', rule.holdS)
    }
    case 'no-alarm': {
      const standing = r.alarms(rule.segments)
      return said(standing.length === 0, standing.length === 0 ? 'none' : standing.join(', '), 'alarms on the path')
    }
    case 'at-most':
      return bad(null, '')
  }
}

/**
 * Judges one point of the running step by a scan. What a person has recorded while readings could not tell stays until readings tell again
 * that it is not so. Returns true when ice is called by this scan.
 */
export function judgePoint(point: Point, rule: Rule, m: Memory, step: CourseStep, r: Readings): boolean {
  if (rule === null || rule.kind === 'at-most' || point.state === 'skipped') return false
  // What a person called failed a person takes back.
  if (point.state === 'failed' && point.person !== null) return false
  const s = ask(rule, m, step, r)
  const recorded = point.person !== null
  if (recorded && (s.ok !== false || rule.kind === 'volume')) return false
  const wasIce = point.state === 'failed'
  // Ice stands until it is warm again.
  if (rule.kind === 'no-ice' && wasIce && s.ok !== null && typeof s.value === 'number' && s.value < cFromK(ice.belowK) + 3) {
    point.value = s.value
    return false
  }
  point.person = null
  point.tMs = null
  point.reason = null
  point.value = s.value
  if (typeof s.value === 'number') point.from ??= s.value
  if (s.ok === true) point.sinceMs ??= r.endMs
  else point.sinceMs = null
  const lasted = point.sinceMs === null ? 0 : (r.endMs - point.sinceMs) / 1000
  const state: PointState = s.ok === null ? 'unknown' : s.why === 'ice' ? 'failed' : s.ok && lasted >= s.holdS ? 'met' : 'not-yet'
  point.state = state
  point.why =
    s.why === 'ice'
      ? 'ΔP rises near or below 0 °C: ice; advised is to stop cooling and to warm'
      : s.ok && state === 'not-yet'
        ? `${s.why}, ${lasted.toFixed(0)} of ${s.holdS} s`
        : s.why
  return state === 'failed' && !wasIce
}
