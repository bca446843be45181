import { isScalar, isSeq } from 'yaml'
import { MonitorError } from '../core/errors.ts'
import { type Act, type LimitName, limitNames } from '../core/sequence.ts'
import type { SettingValue } from '../core/settings/flat.ts'
import { applyChanges, settingOf } from '../core/settings/slots.ts'
import type { LimitsSpec, Skid } from '../core/skid.ts'
import { instantOf } from '../ingest/instant.ts'
import { firstOf } from '../skid/check.ts'
import { parseSkidText } from '../skid/document.ts'
import { meant } from '../skid/nearest.ts'
import { inFileOrder } from '../skid/problem.ts'
import { dictionary, group, list, type Reader, text } from '../skid/readers.ts'
import { detectionShape, limitFields } from '../skid/skid-shape.ts'
import { isNull, type Walk, walkOf } from '../skid/walk.ts'

/** A limit, or null for none. */
const orNone = (limit: Reader<number>): Reader<number | null> => ({
  says: `${limit.says}, or null for no limit`,
  read: (node, path, walk) => (isNull(walk.real(node)) ? null : limit.read(node, path, walk)),
})

const segmentLimits = group(
  Object.fromEntries(limitNames.map((name) => [name, orNone(limitFields[name])])) as Record<LimitName, Reader<number | null>>,
  { nullable: false },
)

const isPlainValue = (v: unknown): v is number | string | boolean => ['number', 'string', 'boolean'].includes(typeof v)
/** A value of any setting; whether it may stand there is judged with the skid. */
const settingValue: Reader<SettingValue> = {
  says: 'a number, a word, a list of these, or null',
  read(node, path, walk) {
    const real = walk.real(node)
    if (isNull(real)) return null
    const value: unknown = isSeq(real) ? real.toJSON() : isScalar(real) ? real.value : undefined
    if (isPlainValue(value) || (Array.isArray(value) && value.every((v) => typeof v === 'string' || typeof v === 'number')))
      return value
    return void walk.say(path, 'a setting that is no value', this.says)
  },
}

const version = group(
  {
    from: text('a time such as 2031-05-05T18:00:00Z'),
    reason: text('why'),
    person: text('who'),
    changes: dictionary('the path of a setting, such as segments.R1.limits.dpHighBar', settingValue, () => null),
  },
  { required: ['from', 'reason', 'changes'] },
)

/** What a settings file may change for one analysis: the promise, limits by segment, and any setting from a time of the log on. */
const settingsShape = (ids: readonly string[]) =>
  group({
    detection: detectionShape,
    limits: dictionary(`a segment (${ids.join(', ')})`, segmentLimits, (id) =>
      ids.includes(id) ? null : { hint: meant(id, ids) },
    ),
    versions: list(version, { min: 0, name: 'versions' }),
  })

/** The values that the file gives. */
const given = <T extends object>(values: { [K in keyof T]?: T[K] | undefined } | undefined): Partial<T> =>
  Object.fromEntries(Object.entries(values ?? {}).filter(([, v]) => v !== undefined)) as Partial<T>

/**
 * The skid with other settings laid over it, and acts that change some from a time of the log on, to see what they would have told. YAML or JSON:
 *
 *   detection: { falseAlarmDays: 30, riseToFindPct: 5 }
 *   limits: { R1: { dpHighBar: 5.5 } }
 *   versions:
 *     - { from: 2031-05-05T20:30:00Z, reason: weaker gasket, person: R. Tamsin, changes: { segments.R1.limits.dpHighBar: 5 } }
 *
 * Read with the same care as a skid file. Errors: SKID_FILE with the place of the first mistake and how many more there are.
 */
export function readSettings(skid: Skid, text: string, file: string): { readonly skid: Skid; readonly acts: readonly Act[] } {
  const wrong = (problems: Parameters<typeof firstOf>[0]) => firstOf(problems, file, null, 'see clearbore analyse --help')
  const { doc, lines, problems } = parseSkidText(text)
  if (doc === null) throw wrong(problems)
  const walk = walkOf(doc, lines)
  const settings = settingsShape(skid.segments.map((s) => s.id)).read(doc.contents, [], walk)
  if (settings === undefined || walk.problems.length > 0) throw wrong(inFileOrder(walk.problems))
  const laid = {
    ...skid,
    detection: { ...skid.detection, ...given<Skid['detection']>(settings.detection) },
    segments: skid.segments.map((s) => ({ ...s, limits: { ...s.limits, ...given<LimitsSpec>(settings.limits?.get(s.id)) } })),
  }
  const acts = actsOf(laid, (settings.versions ?? []) as readonly VersionFile[], walk)
  if (walk.problems.length > 0) throw wrong(inFileOrder(walk.problems))
  return { skid: laid, acts }
}

interface VersionFile {
  readonly from?: string
  readonly reason?: string
  readonly person?: string
  readonly changes?: ReadonlyMap<string, SettingValue | undefined>
}

/** Versions as acts, soonest first; one that the configuration of its time could not hold is a mistake in the file. */
function actsOf(skid: Skid, versions: readonly VersionFile[], walk: Walk): Act[] {
  const timed = versions.map((v, i) => {
    let fromMs = Number.NaN
    try {
      fromMs = instantOf(v.from ?? '', skid.timeZone, 'from')
    } catch (error) {
      if (!(error instanceof MonitorError)) throw error
      walk.say(['versions', i, 'from'], `from is '${v.from ?? ''}'`, 'a time such as 2031-05-05T18:00:00Z', error.hint)
    }
    return { ...v, i, fromMs }
  })
  let now = skid
  return timed
    .toSorted((a, b) => a.fromMs - b.fromMs || a.i - b.i)
    .map(({ i, fromMs, reason = '', person = '', changes = new Map<string, SettingValue | undefined>() }, n) => {
      const made = [...changes].map(([path, value = null]) => {
        const change = { path, old: settingOf(now, path), new: value }
        const out = applyChanges(now, [change])
        for (const why of out.left) walk.say(['versions', i, 'changes', path], why, 'a setting that may change within a run')
        now = out.skid
        return change
      })
      // Decided just before its time: it takes effect with the first scan that begins then.
      return { kind: 'settings', version: n + 1, tMs: fromMs - 1, effectiveMs: fromMs, person, reason, changes: made }
    })
}
