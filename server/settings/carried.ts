import type { Act } from '../core/sequence.ts'
import { handEventOf, subjectOf, waterResult } from '../core/settings/hand-events.ts'
import type { Skid } from '../core/skid.ts'

type Entry = Extract<Act, { readonly kind: 'event' }>
const carriedNote = / \(carried over from run \d+\)$/

/**
 * Water results that still hold when a new run of a skid begins: of the run before it, the last Karl Fischer result of each feed whose drum was
 * not changed since. They enter the new run as acts of their own, with the time of the sample and where they come from.
 */
export function carriedEntries(skid: Skid, run: number, acts: readonly { readonly act: Act }[], tMs: number): Act[] {
  const held = new Map<string, Entry>()
  for (const { act } of acts) {
    if (act.kind !== 'event') continue
    const water = waterResult(skid, act)
    if (water !== null) held.set(water.stream, { ...act, of: water.stream })
    else if (handEventOf(act.event)?.kind === 'drum change') held.delete(subjectOf(skid, act) ?? '')
  }
  return [...held.values()].map((e) => ({
    ...e,
    tMs,
    atMs: e.atMs ?? e.tMs,
    note: `${e.note.replace(carriedNote, '')} (carried over from run ${run})`.trim(),
  }))
}
