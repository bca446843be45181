import { parseDocument } from 'yaml'
import { MonitorError } from '../core/errors.ts'
import { type LimitName, limitNames } from '../core/sequence.ts'
import type { Skid } from '../core/skid.ts'
import { meant } from '../skid/nearest.ts'

/** What a settings file may change for one analysis: the promise and limits by segment. */
interface Settings {
  detection?: { falseAlarmDays?: number; riseToFindPct?: number }
  limits?: Record<string, Partial<Record<LimitName, number | null>>>
}

/**
 * The skid with other settings laid over it, to see what they would have told. YAML or JSON:
 *
 *   detection: { falseAlarmDays: 30, riseToFindPct: 5 }
 *   limits: { R1: { dpHighBar: 5.5 } }
 *
 * Errors: SKID_FILE with place for text that does not parse, an unknown key, a segment the skid has not, a value that is no number.
 */
export function withSettings(skid: Skid, text: string, file: string): Skid {
  const doc = parseDocument(text, { strict: true, uniqueKeys: true })
  const fault = doc.errors[0]
  if (fault !== undefined) {
    const at = fault.linePos?.[0]
    throw new MonitorError('SKID_FILE', fault.message.split('\n')[0]!, {
      place: { file, ...(at === undefined ? {} : { line: at.line, column: at.col }) },
    })
  }
  const refuse = (message: string, hint: string): never => {
    throw new MonitorError('SKID_FILE', message, { place: { file }, hint })
  }
  const known = (name: string, list: readonly string[], what: string): void => {
    if (list.includes(name)) return
    const near = meant(name, list)
    refuse(`unknown ${what} '${name}'`, near === null ? `one of ${list.join(', ')}` : `did you mean ${near}?`)
  }
  const data = doc.toJS({ maxAliasCount: 20 }) as Settings | null
  if (data === null || typeof data !== 'object' || Array.isArray(data))
    return refuse('a settings file holds detection and limits', 'see clearbore analyse --help')
  for (const key of Object.keys(data)) known(key, ['detection', 'limits'], 'setting')
  const number = (value: unknown, path: string): number =>
    typeof value === 'number' && Number.isFinite(value)
      ? value
      : refuse(`${path} must be a number, found ${JSON.stringify(value)}`, 'give a number in the unit the name ends with')
  for (const [key, value] of Object.entries(data.detection ?? {})) {
    known(key, ['falseAlarmDays', 'riseToFindPct'], 'key of detection')
    if (number(value, `detection.${key}`) <= 0) refuse(`detection.${key} must be above 0`, 'give a positive number')
  }
  for (const [segment, limits] of Object.entries(data.limits ?? {})) {
    known(
      segment,
      skid.segments.map((s) => s.id),
      'segment',
    )
    for (const [key, value] of Object.entries(limits)) {
      known(key, limitNames, 'limit')
      if (value !== null) number(value, `limits.${segment}.${key}`)
    }
  }
  return {
    ...skid,
    detection: { ...skid.detection, ...data.detection },
    segments: skid.segments.map((s) => ({ ...s, limits: { ...s.limits, ...data.limits?.[s.id] } })),
  }
}
