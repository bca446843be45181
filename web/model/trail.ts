import type { Trail, TrailGroup, TrailRow } from '../../server/wire/index.ts'
import type { ZoneClock } from './clock.ts'

/** What may be shown, in the order of the boxes; what came and went by itself is left out unless asked for. */
export const trailGroups: readonly { readonly group: TrailGroup; readonly label: string; readonly on: boolean }[] = [
  { group: 'act', label: 'Acts', on: true },
  { group: 'change', label: 'Changes', on: true },
  { group: 'shelve', label: 'Shelving and suppression', on: true },
  { group: 'refused', label: 'Refused', on: true },
  { group: 'access', label: 'Signing in and people', on: true },
  { group: 'run', label: 'Runs and keys', on: true },
  { group: 'review', label: 'Reviews', on: true },
  { group: 'alarm', label: 'Alarms by themselves', on: false },
]

export interface TrailAsk {
  readonly groups: ReadonlySet<TrailGroup>
  readonly person: string
  readonly onlyNew: boolean
  /** ms since 1970 UTC of recording; null: no bound. */
  readonly fromMs: number | null
  readonly toMs: number | null
  readonly from: number
  readonly limit: number
}

export function trailQuery(ask: TrailAsk): string {
  const q = new URLSearchParams({ from: String(ask.from), limit: String(ask.limit), groups: [...ask.groups].join(',') })
  if (ask.person !== '') q.set('person', ask.person)
  if (ask.onlyNew) q.set('onlyNew', 'true')
  if (ask.fromMs !== null) q.set('fromMs', String(ask.fromMs))
  if (ask.toMs !== null) q.set('toMs', String(ask.toMs))
  return q.toString()
}

const spoken: Readonly<Record<string, string>> = {
  'run.begun': 'run begun', 'run.ended': 'run ended', 'run.delete': 'run deleted', 'run.deleted': 'run deleted', 'sign-in': 'signed in', 'sign-out': 'signed out',
  'sign-in.refused': 'sign-in refused', 'person.add': 'person added', 'person.role': 'role changed', 'trail.reviewed': 'trail reviewed',
  'run.comment': 'comment after the end', 'run.event': 'entry after the end', break: 'THE STORE WAS CUT OR REWRITTEN',
} // biome-ignore format: a table

/** What was done, in words. */
export const whatText = (r: Pick<TrailRow, 'what'>): string => spoken[r.what] ?? r.what.replaceAll('.', ' ')

/** Old and new as one text; empty where there is neither. */
export const changeText = ({ old, new: now }: Pick<TrailRow, 'old' | 'new'>): string =>
  old === null ? (now ?? '') : `${old} → ${now ?? 'none'}`

/** How much is shown, and what has come since somebody looked it through. */
export function summaryText(t: Trail, clock: ZoneClock): string {
  const shown =
    t.total === 0 ? 'Nothing passes the filter' : `${t.from + 1} to ${t.from + t.rows.length} of ${t.total}, oldest first`
  const since =
    t.review === null
      ? 'nobody has reviewed it yet'
      : `${t.fresh === 0 ? 'nothing' : t.fresh} new since ${t.review.person} reviewed it on ${clock.full(t.review.atMs)}${t.review.remark === '' ? '' : ` (“${t.review.remark}”)`}`
  return `${shown}; ${since}.`
}
