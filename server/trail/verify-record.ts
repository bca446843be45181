import { createHash } from 'node:crypto'
import { createReadStream } from 'node:fs'
import { open } from 'node:fs/promises'
import { MonitorError } from '../core/errors.ts'
import type { Entry } from '../core/sequence.ts'
import { type RecordHead, readRecord } from '../record/record-json.ts'
import { Columns } from '../store/segment.ts'
import { canonical, wellFormed } from './canonical.ts'
import { sha256 } from './chain.ts'
import { isSigned } from './keys.ts'
import { longestProof, type Proof, readProof, recordStatement } from './proof.ts'
import { readingHash } from './reading-hash.ts'
import type { Chained, RunRecord } from './records.ts'
import { type Fault, walk, whatIs } from './walk.ts'

export interface RecordProof {
  readonly head: RecordHead | null
  /** The key that signed it, in hex; null where it is not signed. */
  readonly key: string | null
  readonly records: number
  readonly chainHead: string
  /** Hash of each good record, in hex. */
  readonly hashes: readonly string[]
  /** Rows whose hash was entered in the chain when they were sealed, and found the same; and those the record holds beyond. */
  readonly provedRows: number
  readonly otherRows: number
  readonly faults: readonly Fault[]
}

type Readings = Chained<Extract<RunRecord, { kind: 'readings' }>>

/** The proof line at the end of a file and the SHA-256 of all before it. */
async function endOf(file: string): Promise<{ proof: Proof; content: string } | null> {
  let handle: Awaited<ReturnType<typeof open>>
  try {
    handle = await open(file)
  } catch (cause) {
    throw new MonitorError('FILE_READ', `cannot read: ${(cause as Error).message}`, {
      place: { file },
      hint: 'check the path',
      cause,
    })
  }
  try {
    const { size } = await handle.stat()
    const tail = Buffer.alloc(Math.min(size, longestProof))
    await handle.read(tail, 0, tail.length, size - tail.length)
    const found = readProof(tail)
    if (found === null) return null
    const end = size - tail.length + found.at
    const hash = createHash('sha256')
    for await (const chunk of createReadStream(file, { end: end - 1 })) hash.update(chunk as Buffer)
    return { proof: found.proof, content: hash.digest('hex') }
  } finally {
    await handle.close()
  }
}

/** The entries against the hashes that the chain holds of them. */
async function checkEntries(
  entries: AsyncIterable<Entry>,
  chain: readonly Chained<RunRecord>[],
  fault: (r: Chained<RunRecord>, found: string) => void,
) {
  const acts = new Map(chain.flatMap((r) => (r.kind === 'act' ? [[r.seq, r] as const] : [])))
  const segments = chain.filter((r): r is Readings => r.kind === 'readings')
  const first = chain[0]!
  let seq = 0
  let segment = 0
  let provedRows = 0
  let otherRows = 0
  let part = new Columns(0)
  const close = (): void => {
    for (let s = segments[segment]; s !== undefined && seq >= s.to; s = segments[++segment]) {
      if (s.content === null) otherRows += part.rows
      else if (readingHash(part) === s.content) provedRows += part.rows
      else fault(s, 'the readings in the file are not those that were sealed')
      part.clear()
    }
  }
  for await (const entry of entries) {
    if (entry.kind === 'act') {
      const r = acts.get(seq)
      if (r === undefined) fault(first, `entry ${seq} is an act of ${entry.act.person} that stands in no record of the chain`)
      else if (canonical(r.act) !== canonical(wellFormed(entry.act))) fault(r, 'the act in the file is another')
      acts.delete(seq)
      seq++
      close()
    } else if (entry.kind === 'tick') {
      part.addTick(entry.tMs)
      seq++
      close()
    } else {
      for (let row = 0; row < entry.block.rows; ) {
        const take = Math.min(entry.block.rows - row, (segments[segment]?.to ?? Number.POSITIVE_INFINITY) - seq)
        part = widened(part, entry.block.width)
        part.addRows(entry.block, row, row + take)
        row += take
        seq += take
        close()
      }
    }
  }
  for (const r of acts.values()) if (r.seq < seq) fault(r, 'the act is gone from the file')
  const short = segments.find((s) => s.to > seq)
  if (short !== undefined) fault(short, 'the readings are gone from the file')
  return { provedRows, otherRows: otherRows + part.rows }
}

/** Columns of this width with the ticks that came before the first row. */
function widened(part: Columns, width: number): Columns {
  if (part.width === width) return part
  const wider = new Columns(width)
  for (let i = 0; i < part.ticks; i++) wider.addTick(part.tickMs[i]!)
  return wider
}

/**
 * Whether an exported record is as it was written, without the store: every byte by the hash in its last line and the signature of that, then the chain
 * it carries, and by the chain its acts, its alarm journal, its words, its configuration and its sealed readings. Errors: FILE_READ, RECORD_FILE.
 */
export async function verifyRecord(file: string, publicKeys: readonly string[] = []): Promise<RecordProof> {
  const faults: Fault[] = []
  const whole = (what: string, found: string): void => void faults.push({ chain: 0, n: null, atMs: null, what, found })
  const end = await endOf(file)
  if (end === null)
    whole('the last line', 'it is not the proof that a record ends with: the file was cut, changed or added to at its end')
  else {
    const { proof, content } = end
    if (content !== proof.content)
      whole('the bytes of the file', 'their hash is not that of its last line: something in it was changed')
    if (proof.signature !== null || proof.key !== null) {
      if (!isSigned(recordStatement(proof.content), Buffer.from(proof.signature ?? '', 'hex'), proof.key ?? ''))
        whole('the signature', 'it does not fit the key and the hash in the last line')
      else if (publicKeys.length > 0 && !publicKeys.includes(proof.key!))
        whole('the signature', 'it is by another key than the one given')
    } else if (publicKeys.length > 0) whole('the signature', 'the record is not signed, by the key given or any other')
  }
  const none = { head: null, key: end?.proof.key ?? null, records: 0, chainHead: '', hashes: [], provedRows: 0, otherRows: 0 }
  try {
    const { head, rest } = await readRecord(file)
    const run = head.run
    const links: { n: number; text: string; hash: null }[] = []
    let transitions = ''
    let isChain = false
    for await (const line of rest()) {
      if (line.startsWith('"transitions":')) transitions = line.slice('"transitions":'.length).replace(/,$/, '')
      else if (line === '"chain":[') isChain = true
      else if (line === '],') isChain = false
      else if (isChain && line !== '') links.push({ n: links.length, text: line.replace(/,$/, ''), hash: null })
    }
    const chain: Chained<RunRecord>[] = []
    const hashes: string[] = []
    const walked = walk(run, links, (r, hash) => {
      chain.push(r as Chained<RunRecord>)
      hashes.push(hash)
    })
    const fault = (r: Chained<RunRecord>, found: string): void =>
      void faults.push({ chain: run, n: r.n, atMs: r.recordedMs, what: whatIs(r), found })
    if (walked.fault !== null) faults.push(walked.fault)
    else if (walked.count !== head.trail?.count || walked.head !== head.trail.head) {
      const found = `the chain ends with record ${walked.count - 1} and another hash than the head of the file says`
      faults.push({ chain: run, n: walked.count - 1, atMs: walked.lastMs, what: 'the end of the chain', found })
    }
    const genesis = chain[0]
    if (genesis?.kind !== 'genesis' || genesis.chain !== 'run') {
      whole('the chain', 'it does not begin with the first record of a run')
      return { ...none, head, faults }
    }
    if (genesis.run !== run || genesis.store !== head.trail.store) fault(genesis, 'the head of the file names another run or store')
    if (genesis.configuration !== sha256(head.skidFile.text)) fault(genesis, 'the skid file in the record is another')
    const words = chain.flatMap((r) => (r.kind === 'words' ? r.words : []))
    if (canonical(words) !== canonical(wellFormed(head.words))) fault(genesis, 'the words of text tags are others')
    const journal = chain.filter((r) => r.kind === 'transition')
    const inFile = JSON.parse(transitions === '' ? 'null' : transitions) as unknown[] | null
    const differs = journal.findIndex((r, i) => canonical(r.transition) !== canonical(wellFormed(inFile?.[i] ?? null)))
    if (differs >= 0) fault(journal[differs]!, 'the alarm journal of the file says something else here')
    else if (inFile === null || inFile.length > journal.length)
      fault(genesis, 'the alarm journal of the file holds more than the chain')
    const { entries } = await readRecord(file)
    const rows = walked.fault === null ? await checkEntries(entries, chain, fault) : { provedRows: 0, otherRows: 0 }
    return { head, key: end?.proof.key ?? null, records: walked.count, chainHead: walked.head, hashes, ...rows, faults }
  } catch (error) {
    if (error instanceof MonitorError && error.code === 'FILE_READ') throw error
    if (faults.length === 0 || !(error instanceof Error)) throw error
    return { ...none, faults: [...faults, { chain: 0, n: null, atMs: null, what: 'the text of the file', found: error.message }] }
  }
}
