import { type LimitName, limitNames } from '../core/sequence.ts'
import type { LimitsSpec, Skid } from '../core/skid.ts'
import { firstOf } from '../skid/check.ts'
import { parseSkidText } from '../skid/document.ts'
import { meant } from '../skid/nearest.ts'
import { inFileOrder } from '../skid/problem.ts'
import { dictionary, group, type Reader } from '../skid/readers.ts'
import { detectionShape, limitFields } from '../skid/skid-shape.ts'
import { isNull, walkOf } from '../skid/walk.ts'

/** A limit, or null for none. */
const orNone = (limit: Reader<number>): Reader<number | null> => ({
  says: `${limit.says}, or null for no limit`,
  read: (node, path, walk) => (isNull(walk.real(node)) ? null : limit.read(node, path, walk)),
})

const segmentLimits = group(
  Object.fromEntries(limitNames.map((name) => [name, orNone(limitFields[name])])) as Record<LimitName, Reader<number | null>>,
  { nullable: false },
)

/** What a settings file may change for one analysis: the promise, and limits by segment. */
const settingsShape = (ids: readonly string[]) =>
  group({
    detection: detectionShape,
    limits: dictionary(`a segment (${ids.join(', ')})`, segmentLimits, (id) =>
      ids.includes(id) ? null : { hint: meant(id, ids) },
    ),
  })

/** The values that the file gives. */
const given = <T extends object>(values: { [K in keyof T]?: T[K] | undefined } | undefined): Partial<T> =>
  Object.fromEntries(Object.entries(values ?? {}).filter(([, v]) => v !== undefined)) as Partial<T>

/**
 * The skid with other settings laid over it, to see what they would have told. YAML or JSON:
 *
 *   detection: { falseAlarmDays: 30, riseToFindPct: 5 }
 *   limits: { R1: { dpHighBar: 5.5 } }
 *
 * Read with the same care as a skid file. Errors: SKID_FILE with the place of the first mistake and how many more there are.
 */
export function withSettings(skid: Skid, text: string, file: string): Skid {
  const wrong = (problems: Parameters<typeof firstOf>[0]) => firstOf(problems, file, null, 'see clearbore analyse --help')
  const { doc, lines, problems } = parseSkidText(text)
  if (doc === null) throw wrong(problems)
  const walk = walkOf(doc, lines)
  const settings = settingsShape(skid.segments.map((s) => s.id)).read(doc.contents, [], walk)
  if (settings === undefined || walk.problems.length > 0) throw wrong(inFileOrder(walk.problems))
  return {
    ...skid,
    detection: { ...skid.detection, ...given<Skid['detection']>(settings.detection) },
    segments: skid.segments.map((s) => ({ ...s, limits: { ...s.limits, ...given<LimitsSpec>(settings.limits?.get(s.id)) } })),
  }
}
