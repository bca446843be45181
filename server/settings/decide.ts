import { MonitorError } from '../core/errors.ts'
import type { ConfigurationState } from '../core/settings/configuration.ts'
import { type SettingChange, type SettingValue, sameSetting } from '../core/settings/flat.ts'
import { applyChanges, isChangeable, settingOf } from '../core/settings/slots.ts'
import type { Skid } from '../core/skid.ts'
import { checkChanged } from './effective.ts'

/** What a change is decided on: the run's skid file and how its configuration came about. */
export interface Ground {
  readonly skid: Skid
  readonly text: string
  readonly file: string
  readonly configuration: ConfigurationState
}

export interface Asked {
  readonly changes: readonly { readonly path: string; readonly new: SettingValue }[]
  readonly effectiveMs: number
  readonly reason: string
}

/** Furthest ahead that a change may be planned. */
const furthestMs = 30 * 86_400_000
const refuse = (message: string, hint = 'nothing has been changed'): MonitorError =>
  new MonitorError('ACT_REFUSED', message, { hint })

/** A reason that says something (USR-05). Errors: ACT_REFUSED. */
export function needReason(reason: string, what: string): void {
  if (reason.trim().length < 5) throw refuse(`${what} needs a reason of at least 5 characters`, 'say why')
}

/**
 * The changes that a person asks for, with what they change: each setting may change within a run, its value is another one, and the
 * configuration that results, then and with all that is planned, is one the skid file could hold. Errors: ACT_REFUSED.
 */
export function decideChanges(g: Ground, nowMs: number, asked: Asked): SettingChange[] {
  const { changes, effectiveMs, reason } = asked
  needReason(reason, 'a change of settings')
  if (changes.length === 0) throw refuse('no setting is named', 'name what to change')
  if (effectiveMs > nowMs + furthestMs) throw refuse('a change may be planned 30 days ahead at most')
  const paths = changes.map((c) => c.path)
  const twice = paths.find((p, i) => paths.indexOf(p) !== i)
  if (twice !== undefined) throw refuse(`${twice} is named twice`)
  const fixed = paths.find((p) => !isChangeable(g.skid, p))
  if (fixed !== undefined)
    throw refuse(
      `${fixed} cannot change within a run`,
      'tags, columns, streams and geometry change with the skid file: edit it and start the server again; a new run begins',
    )
  const taken = g.configuration.applied.flatMap((a) => a.changes)
  const before = g.configuration.planned.filter((p) => p.effectiveMs <= effectiveMs).flatMap((p) => p.changes)
  const after = g.configuration.planned.filter((p) => p.effectiveMs > effectiveMs).flatMap((p) => p.changes)
  const then = applyChanges(g.skid, [...taken, ...before]).skid
  const out = changes.map(({ path, new: now }) => ({ path, old: settingOf(then, path), new: now }))
  const same = out.find((c) => sameSetting(c.old, c.new))
  if (same !== undefined) throw refuse(`${same.path} is ${same.old === null ? 'not set' : JSON.stringify(same.old)} already`)
  const [left] = applyChanges(then, out).left
  if (left !== undefined) throw refuse(left)
  for (const more of after.length === 0 ? [[]] : [[], after]) {
    const [problem] = checkChanged(g.text, g.file, [...taken, ...before, ...out, ...more]).problems
    if (problem !== undefined)
      throw refuse(
        `${more.length > 0 ? 'with what is planned later: ' : ''}${problem.message}; expected ${problem.expected}`,
        problem.hint ?? undefined,
      )
  }
  return out
}
