import { MonitorError } from '../core/errors.ts'
import type { Store } from '../store/open.ts'
import type { Trail, TrailCounts, TrailGroup, TrailReview, TrailReviewSent } from '../wire/trail.ts'
import type { AuditRecord, Chained, SiteRecord } from './records.ts'
import { type PlainRow, runTrail, type SiteRow, siteTrail } from './rows.ts'

type TrailStore = Pick<Store, 'trail' | 'audit'>

export interface TrailFilter {
  readonly from: number
  readonly most: number
  readonly person: string | null
  readonly groups: readonly TrailGroup[] | null
  /** By the time of recording. */
  readonly fromMs: number | null
  readonly toMs: number | null
  readonly onlyNew: boolean
}

/** The run whose trail it is. */
export interface TrailOf {
  readonly run: number
  /** Of the settings of its skid. */
  readonly scope: string
  /** Limits of the skid file; undefined where it has no such segment. */
  readonly limit: (segment: string, limit: string) => number | null | undefined
}

/** The latest review of a run's trail, or of the site's. */
function lastReview(site: readonly Chained<SiteRecord>[], run: number | null): TrailReview | null {
  const found = site.findLast((r): r is Chained<AuditRecord> => r.kind === 'audit' && r.act === 'trail.reviewed' && r.run === run)
  if (found === undefined) return null
  const { counts } = found.body as unknown as { counts: TrailCounts }
  return { person: found.person, atMs: found.tMs, remark: found.reason, counts }
}

/** Whether a row of the site belongs on the page of a run: it is about it, about its skid's settings, or somebody signed in while it went on. */
function concerns(rows: readonly SiteRow[], of: TrailOf): PlainRow[] {
  const at = (what: string) => rows.find((r) => r.run === of.run && r.what === what)?.recordedMs
  const begunMs = at('run.begun') ?? Number.NEGATIVE_INFINITY
  const endedMs = at('run.ended') ?? at('run.delete') ?? Number.POSITIVE_INFINITY
  return rows
    .filter((r) => {
      if (r.scope !== null && (r.run !== null || r.scope !== of.scope)) return false
      // A change of settings on a run stands in its own chain as an act, with each value.
      if (r.run !== null) return r.run === of.run && r.what !== 'settings.change'
      return r.group !== 'review' && r.recordedMs >= begunMs && r.recordedMs <= endedMs
    })
    .map(({ run: _, scope: __, ...row }) => row)
}

/** A page of the trail of a run, or of the site (`of` null), as of one moment. */
export function trailPage(store: TrailStore, of: TrailOf | null, f: TrailFilter): Trail {
  return store.trail.atOnce(() => {
    const site = store.trail.told<SiteRecord>(0)
    const ofSite = siteTrail(site)
    const rows =
      of === null
        ? ofSite.map(({ run: _, scope: __, ...row }) => row)
        : [...runTrail(store.trail.told(of.run), of.limit), ...concerns(ofSite, of)].sort((a, b) => a.recordedMs - b.recordedMs)
    const review = lastReview(site, of?.run ?? null)
    const marked = rows.map((row) => ({ ...row, isNew: row.group !== 'review' && row.n >= (review?.counts[row.chain] ?? 0) }))
    const shown = marked.filter(
      (r) =>
        (f.person === null || r.person === f.person) &&
        (f.groups === null || f.groups.includes(r.group)) &&
        (f.fromMs === null || r.recordedMs >= f.fromMs) &&
        (f.toMs === null || r.recordedMs < f.toMs) &&
        (!f.onlyNew || r.isNew),
    )
    const head = store.trail.head(of?.run ?? 0)
    const { fingerprint, trouble } = store.trail.signing()
    return {
      run: of?.run ?? null,
      rows: shown.slice(f.from, f.from + f.most),
      total: shown.length,
      from: f.from,
      fresh: marked.filter((r) => r.isNew).length,
      people: [...new Set(marked.flatMap((r) => (r.person === null ? [] : [r.person])))].sort(),
      review,
      counts: { run: of === null ? 0 : head.count, site: store.trail.head(0).count },
      head: head.head,
      signing: { fingerprint, trouble },
    }
  })
}

/** Enters that a person has looked a trail through as far as the counts say. Errors: TRAIL_REVIEW when they go back or beyond what there is. */
export function enterReview(
  store: TrailStore & Pick<Store, 'together'>,
  sent: TrailReviewSent,
  person: string,
  nowMs: number,
): void {
  store.together(() => {
    const { run, counts, remark } = sent
    const before = lastReview(store.trail.told<SiteRecord>(0), run)?.counts ?? null
    const now = { run: run === null ? 0 : store.trail.head(run).count, site: store.trail.head(0).count }
    for (const chain of ['run', 'site'] as const)
      if (counts[chain] > now[chain] || counts[chain] < (before?.[chain] ?? 0))
        throw new MonitorError(
          'TRAIL_REVIEW',
          `the chain of the ${chain} has ${now[chain]} records, ${before?.[chain] ?? 0} reviewed before; got ${counts[chain]}`,
          {
            hint: 'load the page again and review what it shows',
          },
        )
    const head = (chain: number, count: number): string | null => (count === 0 ? null : store.trail.hashAt(chain, count - 1))
    store.audit.append({
      tMs: nowMs,
      person,
      act: 'trail.reviewed',
      reason: remark.trim(),
      body: { meaning: 'review of the audit trail', counts: { ...counts } },
      run,
      old: before === null ? null : { ...before },
      new: { run: run === null ? null : head(run, counts.run), site: head(0, counts.site) },
    })
  })
}
