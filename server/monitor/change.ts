import { MonitorError } from '../core/errors.ts'
import type { Act } from '../core/sequence.ts'
import type { Asked } from '../settings/decide.ts'
import { decideChanges } from '../settings/decide.ts'
import { createVersions } from '../settings/versions.ts'
import { loadSkid } from '../skid/check.ts'
import type { Json, RunId } from '../store/keys.ts'
import type { ActBody } from '../wire/act.ts'
import { noSegment } from './act.ts'
import type { Engine } from './engine.ts'
import type { MonitorStore } from './needs.ts'

/** A change of settings as asked for: a limit from the alarm's place, or any settings from their page. */
export type ChangeBody =
  | Extract<ActBody, { readonly kind: 'limit' }>
  | ({ readonly kind: 'settings'; readonly person: string } & Omit<Asked, 'effectiveMs'> & { readonly effectiveMs: number | null })

export const isChange = (body: ActBody | ChangeBody): body is ChangeBody => body.kind === 'limit' || body.kind === 'settings'

/**
 * A change of settings on a live run: judged, numbered, kept as a version of its skid and in the audit trail. Gives the act to be recorded; the
 * transaction around all of it is the caller's. Errors: ACT_REFUSED, TAG_UNKNOWN.
 */
export function decideChange(store: MonitorStore, engine: Engine, body: ChangeBody, nowMs: number): Act {
  const person = body.person.trim()
  if (person === '') throw new MonitorError('ACT_REFUSED', 'every act names the person who does it', { hint: 'give a name' })
  const { skid, run } = engine
  if (body.kind === 'limit' && !skid.segments.some((s) => s.id === body.segment)) throw noSegment(skid, body.segment)
  const { skidText, skidFile } = store.runs.get(run as RunId)
  const asked: Asked =
    body.kind === 'settings'
      ? { ...body, effectiveMs: Math.max(nowMs, body.effectiveMs ?? nowMs) }
      : {
          changes: [{ path: `segments.${body.segment}.limits.${body.limit}`, new: body.value }],
          effectiveMs: nowMs,
          reason: body.reason,
        }
  const ground = { skid, text: skidText, file: skidFile, configuration: engine.pipeline.view().configuration }
  const changes = decideChanges(ground, nowMs, asked)
  const versions = createVersions(store, loadSkid)
  // A run of before there were versions: its file is the first.
  if (versions.file(skid.skid) === null) versions.loaded(skid, { name: skidFile, text: skidText }, nowMs)
  const reason = asked.reason.trim()
  const { effectiveMs } = asked
  const version = versions.decided(skid.skid, { decidedMs: nowMs, effectiveMs, person, reason, run, changes })
  const side = (of: 'old' | 'new'): Json => Object.fromEntries(changes.map((c) => [c.path, c[of]])) as Json
  store.audit.append({
    tMs: nowMs,
    person,
    act: 'settings.change',
    reason,
    body: { skid: skid.skid, version, effectiveMs },
    run,
    old: side('old'),
    new: side('new'),
  })
  if (body.kind === 'limit') return { ...body, reason, person, tMs: nowMs, version }
  return { kind: 'settings', tMs: nowMs, person, version, effectiveMs, changes, reason }
}
