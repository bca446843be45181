import type { Act } from '../sequence.ts'
import type { Skid } from '../skid.ts'
import type { SettingChange } from './flat.ts'
import { applyChanges, settingOf } from './slots.ts'

/** A version of the settings as a run knows it: what a person changed, why, and from when on. */
export interface Version {
  readonly version: number
  readonly person: string
  readonly reason: string
  readonly changes: readonly SettingChange[]
}

/** One step from the skid file to the configuration in force: a version, or a result entered by hand (version null). */
export interface Applied extends Omit<Version, 'version'> {
  readonly version: number | null
  /** Sequence time that it took effect; −1 before the first reading. */
  readonly fromMs: number
}

/** Plain JSON. */
export interface ConfigurationState {
  applied: Applied[]
  /** Versions that take effect later, soonest first; of one time in the order decided. */
  planned: (Version & { readonly effectiveMs: number })[]
}

/** What took effect, and what of it could not stand. */
export interface Took {
  readonly applied: Applied
  readonly left: readonly string[]
}

type SettingsAct = Extract<Act, { readonly kind: 'settings' | 'limit' }>

/**
 * The configuration in force on a run: the skid file as given with every version that has taken effect laid over it, in the order they did.
 * Version 0 is the skid file of a run that names no version of its own. An act whose time has come takes effect at its place in the
 * sequence, one for later with the first scan that begins at or after its time. Errors: none; what cannot stand is left out and said.
 */
export function createConfiguration(base: Skid, saved?: ConfigurationState) {
  const state: ConfigurationState = saved ?? {
    applied: [{ version: 0, fromMs: -1, person: 'file', reason: 'the skid file as given', changes: [] }],
    planned: [],
  }
  let skid = applyChanges(
    base,
    state.applied.flatMap((a) => a.changes),
  ).skid

  function apply(v: Omit<Applied, 'fromMs'>, tMs: number): Took {
    const out = applyChanges(skid, v.changes)
    skid = out.skid
    const applied: Applied = { version: v.version, fromMs: tMs, person: v.person, reason: v.reason, changes: v.changes }
    // The first version that a run names before its first reading says what its file was.
    if (tMs < 0 && state.applied.length === 1 && state.applied[0]!.version === 0) state.applied = []
    state.applied.push(applied)
    return { applied, left: out.left }
  }

  const highest = (): number => Math.max(0, ...state.applied.map((a) => a.version ?? 0), ...state.planned.map((p) => p.version))

  function versionOf(act: SettingsAct): Version & { readonly effectiveMs: number } {
    if (act.kind === 'settings') {
      const { version, person, reason, changes, effectiveMs } = act
      return { version, person, reason, changes, effectiveMs }
    }
    const path = `segments.${act.segment}.limits.${act.limit}`
    return {
      version: act.version ?? highest() + 1,
      person: act.person,
      reason: act.reason,
      effectiveMs: act.tMs,
      changes: [{ path, old: settingOf(skid, path), new: act.value }],
    }
  }

  return {
    state,
    skid: (): Skid => skid,
    /** The version that took effect last. */
    version: (): number => state.applied.findLast((a) => a.version !== null)?.version ?? 0,
    /** A change decided by a person; `fromMs` is what is written down when it takes effect at once, −1 before the first reading. */
    take(act: SettingsAct, fromMs: number): Took[] {
      const v = versionOf(act)
      if (v.effectiveMs <= act.tMs) return [apply(v, fromMs)]
      state.planned.push(v)
      state.planned.sort((a, b) => a.effectiveMs - b.effectiveMs || a.version - b.version)
      return []
    },
    /** Changes that take effect by a scan which begins at `tMs`. */
    due(tMs: number): readonly Took[] {
      if (state.planned.length === 0) return nothing
      const out: Took[] = []
      while (state.planned.length > 0 && state.planned[0]!.effectiveMs <= tMs) {
        const next = state.planned.shift()!
        out.push(apply(next, next.effectiveMs))
      }
      return out
    },
    /** A result entered by hand: it holds from then on and is no version. */
    enter: (change: SettingChange, person: string, reason: string, fromMs: number): Took =>
      apply({ version: null, person, reason, changes: [change] }, fromMs),
  }
}

/** Asked for at every scan. */
const nothing: readonly Took[] = []
