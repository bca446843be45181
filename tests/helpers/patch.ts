import type { FlatSettings, SettingChange } from '../../server/core/settings/flat.ts'

/** Settings with changes laid over them. */
export function patch(of: FlatSettings, changes: readonly Pick<SettingChange, 'path' | 'new'>[]): FlatSettings {
  const out: Record<string, Exclude<SettingChange['new'], null>> = { ...of }
  for (const { path, new: now } of changes) {
    if (now === null) delete out[path]
    else out[path] = now
  }
  return out
}
