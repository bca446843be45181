import type { SettingValue } from '../core/settings/flat.ts'

/** One setting, old and new; null is not set. `unit` null where it has none. */
export interface SettingRow {
  readonly path: string
  readonly unit: string | null
  readonly old: SettingValue
  readonly new: SettingValue
}

/** A version of a skid's settings. Version 1 is the skid file as first loaded. */
export interface VersionRow {
  readonly version: number
  /** file: the skid file was loaded anew and counts whole; change: a person changed settings within a run. */
  readonly kind: 'file' | 'change'
  /** When it was decided, and from when on it holds, in the time of its run; of a file the time of the machine. */
  readonly decidedMs: number
  readonly effectiveMs: number
  readonly person: string
  readonly reason: string
  /** The run it was decided on; null of a file. */
  readonly run: number | null
  /** Still to take effect. */
  readonly planned: boolean
  readonly changes: readonly SettingRow[]
}

/** A setting that may change within a run, as it stands now. */
export interface OpenSetting {
  readonly path: string
  readonly unit: string | null
  readonly value: SettingValue
  /** Which page section it stands in, and what it is called there. */
  readonly group: string
  readonly name: string
}

/** `GET /api/skids/:skid/settings`. */
export interface SettingsPage {
  readonly skid: string
  readonly title: string
  /** The live run that a change would act on; null: nothing can be changed now. */
  readonly run: number | null
  /** The version in force: it took effect last. */
  readonly version: number
  /** Oldest first. */
  readonly versions: readonly VersionRow[]
  readonly settings: readonly OpenSetting[]
  /** What cannot change within a run, and how it is changed, in plain words. */
  readonly fixed: string
}

/** `GET /api/skids/:skid/settings/compare?from&to`: what must change in one version's configuration to give the other's. */
export interface SettingsComparison {
  readonly from: number
  readonly to: number
  readonly changes: readonly SettingRow[]
  /** Of tags, streams and segments. */
  readonly added: readonly string[]
  readonly removed: readonly string[]
}

/** `POST /api/skids/:skid/settings` (→ ActReply): a change, from now on or from a later time of the live run on. The person is who is signed in. */
export interface SettingsSent {
  readonly reason: string
  /** null: at once. */
  readonly effectiveMs: number | null
  readonly changes: readonly { readonly path: string; readonly new: SettingValue }[]
}
