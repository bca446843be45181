import { canonical } from './canonical.ts'
import { hashOf, nothing } from './chain.ts'
import type { Chained, RunRecord, SiteRecord } from './records.ts'

type AnyRecord = Chained<RunRecord | SiteRecord>

/** A record that is not as it was written. */
export interface Fault {
  /** A run's number; 0 is the site. */
  readonly chain: number
  /** Number of the record in its chain; null where no record can be named. */
  readonly n: number | null
  /** When it was recorded, where that can still be read. */
  readonly atMs: number | null
  /** What the record is, in a few words. */
  readonly what: string
  readonly found: string
}

/** A record in a few words. */
export function whatIs(r: AnyRecord): string {
  if (r.kind === 'act') return `act '${r.act.kind}' of ${r.act.person}, entry ${r.seq}`
  if (r.kind === 'transition')
    return `alarm ${r.transition.key ?? ''}: ${r.transition.input} from ${r.transition.from} to ${r.transition.to}`
  if (r.kind === 'readings') return `readings, entries ${r.from} to ${r.to - 1}`
  if (r.kind === 'events') return `outputs ${r.from} to ${r.from + r.count - 1} of the pipeline`
  if (r.kind === 'audit') return `${r.act} of ${r.person}`
  if (r.kind === 'settings') return `settings '${r.scope}' version ${r.version} of ${r.person}`
  if (r.kind === 'words') return `words ${r.from} to ${r.from + r.words.length - 1} of text tags`
  if (r.kind === 'genesis') return 'first record'
  if ('run' in r) return `${r.kind} of run ${r.run}`
  return r.kind
}

export interface Walked {
  readonly count: number
  /** Hash of the last good record in hex. */
  readonly head: string
  readonly lastMs: number | null
  /** The first record that is not as it was written; nothing is known of those behind it. */
  readonly fault: Fault | null
}

/**
 * Follows a chain record by record: numbers, canonical form, hashes. `hash` is what was stored beside the text (null: only the chain's end is known,
 * as in an exported record). `visit` sees each good record.
 */
export function walk(
  chain: number,
  links: Iterable<{ readonly n: number; readonly text: string; readonly hash: Uint8Array | null; readonly kind?: string }>,
  visit: (record: AnyRecord, hash: string) => void,
): Walked {
  let head: Uint8Array = nothing
  let count = 0
  let lastMs: number | null = null
  const broken = (n: number, found: string, record: Partial<AnyRecord> | null): Walked => {
    let what = 'unreadable'
    try {
      if (record !== null) what = whatIs(record as AnyRecord)
    } catch {
      // Too broken for words.
    }
    const fault = { chain, n, atMs: typeof record?.recordedMs === 'number' ? record.recordedMs : lastMs, what, found }
    return { count, head: Buffer.from(head).toString('hex'), lastMs, fault }
  }
  for (const { n, text, hash, kind } of links) {
    if (n !== count) return broken(count, n > count ? 'the record is gone' : `a record with number ${n} stands in its place`, null)
    let record: AnyRecord
    try {
      record = JSON.parse(text) as AnyRecord
      if (canonical(record) !== text) return broken(n, 'its text is not as it was written', record)
    } catch {
      return broken(n, 'its text is no JSON', null)
    }
    if (record.n !== n) return broken(n, `record ${String(record.n)} stands in its place`, record)
    const own = hashOf(head, text)
    if (hash !== null && !own.equals(hash))
      return broken(n, 'it was changed, or one before it was: its hash does not follow', record)
    if (kind !== undefined && kind !== record.kind)
      return broken(n, `it is kept as '${kind}', so that a page would not show it`, record)
    if ((n === 0) !== (record.kind === 'genesis')) return broken(n, 'the chain does not begin with its first record', record)
    head = own
    count++
    lastMs = record.recordedMs
    visit(record, own.toString('hex'))
  }
  return { count, head: Buffer.from(head).toString('hex'), lastMs, fault: null }
}
