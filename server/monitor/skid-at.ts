import type { PipelineEvent } from '../core/pipeline/events.ts'
import { applyChanges } from '../core/settings/slots.ts'
import type { Skid } from '../core/skid.ts'
import type { RunParts } from './trends.ts'

/** The configuration of a stored run as it stood at a moment: its skid file with what had taken effect by then. */
export function skidAt({ store, skid, run }: RunParts, atMs: number): Skid {
  const changes = store.events.list(run).flatMap(({ tMs, kind, body }) => {
    if (kind !== 'configuration' || tMs > atMs) return []
    return (body as unknown as Extract<PipelineEvent, { kind: 'configuration' }>).applied.changes
  })
  return changes.length === 0 ? skid : applyChanges(skid, changes).skid
}
