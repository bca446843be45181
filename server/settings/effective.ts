import type { SettingChange } from '../core/settings/flat.ts'
import { checkSkid, type SkidCheck } from '../skid/check.ts'
import { parseSkidText } from '../skid/document.ts'

type Group = Record<string, unknown>
const isGroup = (v: unknown): v is Group => typeof v === 'object' && v !== null && !Array.isArray(v)

/** The member of a group by its key, or of a list by its id or tag. */
function memberOf(of: unknown, key: string): unknown {
  if (Array.isArray(of)) return of.find((v) => isGroup(v) && (v['id'] === key || v['tag'] === key))
  return isGroup(of) && Object.hasOwn(of, key) ? of[key] : undefined
}

/** Sets a value by its path; null takes it away, and with it groups that it leaves empty. */
function set(of: unknown, [key, ...rest]: readonly string[], value: SettingChange['new']): void {
  if (key === undefined) return
  if (rest.length > 0) {
    const inner = memberOf(of, key)
    if (inner !== undefined && inner !== null) set(inner, rest, value)
    else if (value !== null && isGroup(of)) {
      of[key] = {}
      set(of[key], rest, value)
    }
    const left = isGroup(of) ? of[key] : undefined
    if (isGroup(left) && Object.keys(left).length === 0) delete (of as Group)[key]
  } else if (isGroup(of)) {
    if (value === null) delete of[key]
    else of[key] = value
  }
}

/** What is no key of a skid file: that a baseline was learnt anew. */
const isOfFile = (c: Pick<SettingChange, 'path'>): boolean => !c.path.endsWith('.baselineVersion')

/**
 * The skid file with changes laid over it, read with the same care as a file that held them: every range, and all that must hold between
 * settings (a high limit below the high-high one …). The file itself must be good.
 */
export function checkChanged(text: string, file: string, changes: readonly Pick<SettingChange, 'path' | 'new'>[]): SkidCheck {
  const { doc } = parseSkidText(text)
  if (doc === null) return checkSkid(text, file)
  const plain = JSON.parse(JSON.stringify(doc.toJS())) as Group
  for (const change of changes.filter(isOfFile)) set(plain, change.path.split('.'), change.new)
  return checkSkid(JSON.stringify(plain), file)
}
