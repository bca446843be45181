import { MonitorError } from '../core/errors.ts'
import type { Act } from '../core/sequence.ts'
import { diff, type FlatSettings, flatten, type SettingChange } from '../core/settings/flat.ts'
import { applyChanges } from '../core/settings/slots.ts'
import type { Skid } from '../core/skid.ts'
import type { Json, RunId } from '../store/keys.ts'
import type { Store } from '../store/open.ts'

/** A version of a skid's settings as the store keeps it. */
export interface StoredVersion {
  readonly version: number
  readonly kind: 'file' | 'change'
  readonly decidedMs: number
  readonly effectiveMs: number
  readonly person: string
  readonly reason: string
  readonly run: number | null
  /** The skid file, of a version of kind file. */
  readonly file: { readonly name: string; readonly text: string } | null
  readonly changes: readonly SettingChange[]
}

type Kept = Omit<StoredVersion, 'person' | 'reason' | 'decidedMs'>
export type SettingsStore = Pick<Store, 'settings' | 'sequence'>

const scopeOf = (skid: string): string => `skid:${skid}`

/**
 * The versions of the settings of each skid: the skid file as loaded, every later change of a person, and the file again whenever it differs on
 * disk. Numbered 1, 2, 3 … for each skid. A file counts whole: what a person had changed and the file does not hold is undone by it.
 */
export function createVersions(store: SettingsStore, skidOf: (text: string, file: string) => Skid) {
  function list(skid: string): StoredVersion[] {
    return store.settings.list(scopeOf(skid)).map(({ tMs, person, reason, settings }) => {
      const kept = settings as unknown as Kept
      return { ...kept, decidedMs: tMs, person, reason }
    })
  }

  function put({ decidedMs, person, reason, ...kept }: StoredVersion, skid: string): void {
    store.settings.put({ scope: scopeOf(skid), tMs: decidedMs, person, reason, settings: kept as unknown as Json })
  }

  /** Whether a change has taken effect: at once, or because its run went on beyond its time. */
  const tookEffect = (v: StoredVersion): boolean =>
    v.effectiveMs <= v.decidedMs ||
    (v.run !== null && (store.sequence.span(v.run as RunId)?.toMs ?? Number.NEGATIVE_INFINITY) >= v.effectiveMs)

  /** The file that a version rests on, and all changes of people to that file in the order they take effect. */
  function chapterOf(all: readonly StoredVersion[], version: number): { file: StoredVersion; changes: StoredVersion[] } {
    const file = all.findLast((v) => v.kind === 'file' && v.version <= version)
    if (file === undefined) throw new MonitorError('STORE_DATA', 'settings without the skid file that they change')
    const next = all.find((v) => v.kind === 'file' && v.version > file.version)?.version ?? Number.POSITIVE_INFINITY
    const changes = all.filter((v) => v.version > file.version && v.version < next)
    return { file, changes: changes.toSorted((a, b) => a.effectiveMs - b.effectiveMs || a.version - b.version) }
  }

  /** The configuration right after a version took effect. Errors: SETTINGS_UNKNOWN. */
  function at(skid: string, version: number): Skid {
    const all = list(skid)
    if (!all.some((v) => v.version === version))
      throw new MonitorError('SETTINGS_UNKNOWN', `skid ${skid} has no version ${version} of its settings`, {
        hint: all.length === 0 ? 'it has none yet' : `1 to ${all.length}`,
      })
    const { file, changes } = chapterOf(all, version)
    const until = changes.slice(0, changes.findIndex((v) => v.version === version) + 1)
    return applyChanges(
      skidOf(file.file!.text, file.file!.name),
      until.flatMap((v) => v.changes),
    ).skid
  }

  /** The version that took effect last; 0 where there is none. */
  function inForce(skid: string): number {
    const all = list(skid)
    if (all.length === 0) return 0
    const { file, changes } = chapterOf(all, all.at(-1)!.version)
    return (changes.findLast(tookEffect) ?? file).version
  }

  return {
    list,
    tookEffect,
    at,
    inForce,
    /** The text of the skid file that the latest version rests on; null before any. */
    file: (skid: string): StoredVersion['file'] => list(skid).findLast((v) => v.kind === 'file')?.file ?? null,
    flat: (skid: string, version: number): FlatSettings => flatten(at(skid, version)),
    /** A skid file is in use from now on: a version of its own where it is the first, or differs from the last that was loaded. */
    loaded(skid: Skid, file: { readonly name: string; readonly text: string }, tMs: number): void {
      const all = list(skid.skid)
      const last = all.findLast((v) => v.kind === 'file')
      if (last?.file?.text === file.text) return
      const before = all.length === 0 ? {} : flatten(at(skid.skid, inForce(skid.skid)))
      put(
        {
          version: all.length + 1,
          kind: 'file',
          decidedMs: tMs,
          effectiveMs: tMs,
          person: 'file',
          reason: all.length === 0 ? 'skid file as first loaded' : 'file changed on disk',
          run: null,
          file,
          changes: all.length === 0 ? [] : diff(before, flatten(skid)),
        },
        skid.skid,
      )
    },
    /**
     * What a new run of a skid begins with, as acts: the version of its file, then each later change. Those that have taken effect hold from
     * the beginning; those still to come keep their time.
     */
    opening(skid: string, tMs: number): Act[] {
      const all = list(skid)
      if (all.length === 0) return []
      const { file, changes } = chapterOf(all, all.at(-1)!.version)
      const act = (v: StoredVersion, effectiveMs: number): Act => ({
        kind: 'settings',
        tMs,
        person: v.person,
        reason: v.reason,
        version: v.version,
        effectiveMs,
        changes: v.kind === 'file' ? [] : v.changes,
      })
      return [act(file, tMs), ...changes.map((v) => act(v, tookEffect(v) ? tMs : v.effectiveMs))]
    },
    /** Numbers and keeps a change that a person decided on a run. One transaction with the act is the caller's. */
    decided(skid: string, v: Omit<StoredVersion, 'version' | 'kind' | 'file'>): number {
      const version = list(skid).length + 1
      put({ ...v, version, kind: 'change', file: null }, skid)
      return version
    },
  }
}
export type Versions = ReturnType<typeof createVersions>
