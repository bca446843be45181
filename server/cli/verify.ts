import { readFileSync } from 'node:fs'
import { MonitorError } from '../core/errors.ts'
import { openStore } from '../store/open.ts'
import type { StoreProof } from '../store/verify.ts'
import type { KnownHead } from '../store/verify-heads.ts'
import { type Anchor, fingerprintOf, readPublicKey } from '../trail/keys.ts'
import { type RecordProof, verifyRecord } from '../trail/verify-record.ts'
import type { Fault } from '../trail/walk.ts'
import type { Command } from './command.ts'
import { storeOptions } from './key-folder.ts'
import { readOptions, usage, wholeIn } from './options.ts'

const help = `Usage: clearbore verify FILE | --data DIR [--against FILE] [--head HASH --count N [--run N]] [--public-key FILE]…

Is this exported record, is this store, untouched since it was written? Reads only. Names the first bad record of each chain: where, which
number, when, what it is.

  FILE               a record written by export; the store is not needed
  --data DIR         a store: every chain, every row the chains stand for, every signature; may run beside a server
  --head HASH --count N   the head of a chain as printed with a report: finds an end that was cut off.
                     Of a store this is the head of run --run N, or of the site's chain without it
  --against FILE     the same out of a file: an exported record, FILE.facts.json, or the head kept beside the key
  --public-key FILE  only what this key signed is right (PEM or 64 hex digits; repeatable when the key was changed).
                     Without it the key in the file is taken, and its fingerprint is for you to compare
  --keys DIR         where the key of the store and its last signed head lie (default as for serve)

It is tamper-evident: it shows that something was changed, it does not keep anybody from it. What was recorded after the last signed head, and
who held both data and key, it cannot tell.

Exit code 0 when untouched; 1 when not; 2 for a wrong command line; 3 when the machine fails.
`

const text = { type: 'string' } as const
const zones = (ms: number): string => (Number.isFinite(ms) && Math.abs(ms) < 8.64e15 ? new Date(ms).toISOString() : String(ms))
const some = 20
/** Heads are signed each minute; a process that was killed leaves no more than that. */
const unsignedMs = 5 * 60_000

const chainName = (chain: number): string => (chain === 0 ? 'the site' : `run ${chain}`)

function faultLines(faults: readonly Fault[], where: (f: Fault) => string): string {
  const line = (f: Fault): string =>
    `${where(f)}${f.n === null ? '' : `, record ${f.n}`}${f.atMs === null ? '' : ` of ${zones(f.atMs)}`}: ${f.what}: ${f.found}`
  const [first, ...more] = faults
  return [
    `NOT UNTOUCHED. First bad record: ${line(first!)}`,
    ...more.slice(0, some).map((f) => `  also: ${line(f)}`),
    ...(more.length > some ? [`  and ${more.length - some} more`] : []),
    '',
  ].join('\n')
}

const keyLines = (keys: readonly string[], given: readonly string[]): string[] =>
  keys.map(
    (key) =>
      `  key ${fingerprintOf(key)}${given.includes(key) ? ', the one given' : ': compare this fingerprint with one kept elsewhere'}`,
  )

function storeText(p: StoreProof, given: readonly string[]): string {
  const lines = [`store ${p.store}`]
  for (const c of p.chains) {
    const rows = c.chain === 0 || c.isDeleted ? '' : `, ${c.sealedRows} rows of readings sealed, ${c.stagedRows} not yet`
    const last = c.lastMs === null ? '' : `, last ${zones(c.lastMs)}`
    lines.push(
      `  ${chainName(c.chain)}${c.chain === 0 ? '' : ` (${c.title}${c.isDeleted ? ', deleted' : ''})`}: ${c.records} records${last}${rows}`,
    )
    lines.push(`    head ${c.head} count ${c.records}`)
  }
  if (p.signed === null) lines.push('no head is signed: this shows accidents, not what somebody did who could rewrite the file')
  else
    lines.push(
      `${p.signed.heads} signed heads, the last at ${zones(p.signed.tMs)}; ${p.unsigned} records since`,
      ...keyLines(p.signed.keys, given),
    )
  const bare = p.signed === null ? 0 : Math.max(...p.chains.map((c) => c.lastMs ?? 0)) - p.signed.tMs
  if (bare > unsignedMs)
    lines.push(
      `NOT SIGNED for the last ${Math.round(bare / 60_000)} min of records: of them this shows accidents, not what somebody did who could rewrite the file`,
    )
  lines.push('summary pages and snapshots are made from what was verified and were not themselves looked at', '')
  return lines.join('\n')
}

function recordText(p: RecordProof, given: readonly string[]): string {
  if (p.head === null) return ''
  const { run, title, exportedAt, trail } = p.head
  return [
    `record of run ${run} (${title}) of store ${trail?.store ?? 'unknown'}, exported ${exportedAt}`,
    `  ${p.records} records, head ${p.chainHead} count ${p.records}`,
    `  ${p.provedRows} rows of readings as they were sealed, ${p.otherRows} covered by the hash of the file alone`,
    ...(p.key === null
      ? ['not signed: this shows accidents, not what somebody did who could rewrite the file']
      : ['signed', ...keyLines([p.key], given)]),
    '',
  ].join('\n')
}

/** Heads out of a file: a record (its first line), the facts beside a CSV, or a head kept beside the key. Errors: FILE_READ. */
function headsIn(file: string): { store: string; head: KnownHead } {
  const bad = (message: string, cause?: unknown) =>
    new MonitorError('FILE_READ', message, {
      place: { file },
      hint: 'expected an exported record, its facts, or a signed head',
      cause,
    })
  let content: string
  try {
    content = readFileSync(file, 'utf8')
  } catch (cause) {
    throw bad(`cannot read: ${(cause as Error).message}`, cause)
  }
  const line = content.slice(0, content.indexOf('\n'))
  type Facts = { run?: number; trail?: Anchor } & Partial<Anchor>
  let facts: Facts
  try {
    facts = JSON.parse(line.endsWith(',') && line.startsWith('{"record":') ? `${line.slice(0, -1)}}` : content) as Facts
  } catch (cause) {
    throw bad('found no JSON', cause)
  }
  const { store, count, head } = facts.trail ?? facts
  if (typeof store !== 'string' || typeof count !== 'number' || typeof head !== 'string')
    throw bad('found no head of a chain in it')
  return { store, head: { chain: facts.trail === undefined ? 0 : (facts.run ?? 0), count, head, from: file } }
}

export const verifyCommand: Command = {
  name: 'verify',
  summary: 'is this record, is this store, untouched since it was written?',
  help,
  async run(args, io) {
    const { values: v, positionals } = readOptions(
      'verify',
      args,
      {
        data: text,
        against: text,
        head: text,
        count: text,
        run: text,
        keys: text,
        'public-key': { type: 'string', multiple: true },
      },
      true,
    )
    if (positionals.length > 1 || (positionals.length === 1) === (v.data !== undefined))
      throw usage('verify', 'verify needs one FILE, or --data DIR')
    if ((v.head === undefined) !== (v.count === undefined)) throw usage('verify', '--head and --count go together')
    if (v.head !== undefined && !/^[0-9a-f]{64}$/i.test(v.head)) throw usage('verify', '--head needs 64 hex digits')
    if (v.run !== undefined && (v.data === undefined || v.head === undefined))
      throw usage('verify', '--run says which chain of a store --head is of')
    const given = (v['public-key'] ?? []).map(readPublicKey)
    const heads: KnownHead[] = []
    const against = v.against === undefined ? null : headsIn(v.against)
    if (against !== null) heads.push(against.head)
    if (v.head !== undefined)
      heads.push({
        chain: v.run === undefined ? 0 : wholeIn('verify', '--run', v.run, 1, Number.MAX_SAFE_INTEGER),
        count: wholeIn('verify', '--count', v.count!, 1, Number.MAX_SAFE_INTEGER),
        head: v.head.toLowerCase(),
        from: '--head',
      })

    let faults: readonly Fault[]
    let where = (f: Fault): string => chainName(f.chain)
    if (v.data === undefined) {
      const file = positionals[0]!
      const proof = await verifyRecord(file, given)
      await io.out(recordText(proof, given))
      faults = [...proof.faults, ...headFaults(proof, heads, against?.store ?? null)]
      where = (f) => (f.chain === 0 ? file : `${file}, run ${f.chain}`)
    } else {
      const proof = proveStore(v.data, storeOptions(io, v.keys), given, heads)
      if (against !== null && against.store !== proof.store)
        throw new MonitorError('FILE_READ', `it is of store ${against.store}, this is ${proof.store}`, {
          place: { file: v.against! },
        })
      await io.out(storeText(proof, given))
      faults = proof.faults
    }
    if (faults.length === 0) {
      await io.out('UNTOUCHED: every record, everything the records stand for and every signature agree.\n')
      return 0
    }
    await io.out(faultLines(faults, where))
    return 1
  },
}

/** A store too damaged to be read was not left as it was written. */
function proveStore(
  data: string,
  options: ReturnType<typeof storeOptions>,
  publicKeys: readonly string[],
  heads: readonly KnownHead[],
): StoreProof {
  try {
    const store = openStore(data, { readonly: true, ...options })
    try {
      return store.trail.verify({ publicKeys, heads })
    } finally {
      store.close()
    }
  } catch (error) {
    if (!(error instanceof MonitorError) || error.code !== 'STORE_CORRUPT') throw error
    const fault: Fault = { chain: 0, n: null, atMs: null, what: 'the file of the store', found: error.message }
    return { store: 'unreadable', chains: [], signed: null, unsigned: 0, faults: [fault] }
  }
}

/** An end that was cut off is found by a head from elsewhere, whose record must stand in the chain of the file. */
function headFaults(p: RecordProof, heads: readonly KnownHead[], store: string | null): Fault[] {
  const run = p.head?.run ?? 0
  return heads.flatMap((h) => {
    const isOther = store !== null && (store !== p.head?.trail?.store || h.chain !== run)
    const found = isOther
      ? 'it is of another run'
      : p.hashes[h.count - 1] === h.head
        ? null
        : p.records < h.count
          ? `the chain has only ${p.records} of ${h.count} records: its end was cut off`
          : 'it, or a record before it, is another'
    return found === null ? [] : [{ chain: run, n: h.count - 1, atMs: null, what: `the head that ${h.from} gives`, found }]
  })
}
