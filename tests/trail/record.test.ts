import { createHash, createPublicKey, verify } from 'node:crypto'
import { readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { beforeEach, describe, expect, it } from 'vitest'
import { howToVerify, type RecordHead, recordText } from '../../server/record/record-json.ts'
import { hashOf, nothing } from '../../server/trail/chain.ts'
import { verifyRecord } from '../../server/trail/verify-record.ts'
import { cli } from '../helpers/cli.ts'
import { entriesOf } from '../store/appender.ts'
import { aRun, newFolder, newStore } from '../store/helpers.ts'

/** A record of 400 entries, 300 of them sealed, with acts, ticks, words and an alarm. */
function sample(isSigned: boolean): { text: string; key: string | null } {
  const keys = newFolder()
  const store = newStore(newFolder(), { synchronous: 'NORMAL', wallMs: () => 1.9e12, ...(isSigned ? { keys } : {}) })
  const run = store.runs.create(aRun)
  store.sequence.append([{ run, entries: entriesOf(run, 0, 300), words: { from: 0, words: ['startup', 'production'] } }])
  const t = { alarm: 1, tMs: 5, from: 'NORM', to: 'UNACK', input: 'act', person: null, reason: null, value: 6.5 }
  store.transitions.append(run, 0, [{ ...t, more: { ...t, key: 'dp-limit:R1' } }])
  store.runs.setState(run, 'ended')
  store.upkeep()
  store.sequence.append([{ run, entries: entriesOf(run, 300, 400) }])
  // Half a character, as a careless paste brings it, and a whole one.
  const text = 'half \ud83d, whole \ud83d\ude00'
  store.sequence.append([
    { run, entries: [{ kind: 'act', act: { kind: 'comment', alarm: null, text, tMs: 6, person: 'demo operator' } }] },
  ])
  store.events.append(run, 0, [{ seq: 1, tMs: 1, kind: 'note', body: { text: 'a note' } }])
  const trail = store.trail.ofRun(run)
  const head = {
    record: 1, run, title: 'night', exportedAt: '2031-05-05T00:00:00.000Z', words: store.runs.words(run),
    skidFile: { name: 'heron.yaml', text: aRun.skidText },
    trail: { store: store.trail.signing().store, count: trail.length, head: trail.at(-1)!.hash },
  } as unknown as RecordHead // biome-ignore format: a list
  const record = [
    ...recordText({
      head,
      entries: store.sequence.read(run),
      transitions: store.transitions.list(run).map((row) => row.more as never),
      report: { report: 1 } as never,
      chain: trail.map((l) => l.text),
      sign: store.trail.sign,
    }),
  ].join('')
  return { text: record, key: store.trail.signing().key }
}

const file = (text: string | Buffer): string => {
  const path = join(newFolder(), 'record.json')
  writeFileSync(path, text)
  return path
}
/** The same text with a proof line that fits it, as anybody can make one who has no key. */
function proved(text: string): string {
  const body = text.slice(0, text.lastIndexOf('"proof":'))
  const content = createHash('sha256').update(body).digest('hex')
  return `${body}"proof":{"content":"${content}","key":null,"signature":null}}\n`
}

let signed: { text: string; key: string | null }
beforeEach(() => {
  signed = sample(true)
})

// REC-10, REC-11
describe('an exported record', () => {
  it('stands alone: 300 entries are as they were sealed, the rest is covered by the hash of the file; it is valid JSON', async () => {
    const proof = await verifyRecord(file(signed.text), [signed.key!])
    const rows = entriesOf(1, 0, 300).filter((e) => e.kind === 'rows').length
    expect(proof).toMatchObject({
      faults: [],
      key: signed.key,
      provedRows: rows,
      otherRows: entriesOf(1, 300, 400).filter((e) => e.kind === 'rows').length,
    })
    const parsed = JSON.parse(signed.text) as { chain: unknown[]; proof: { key: string } }
    expect([parsed.chain.length, parsed.proof.key]).toEqual([proof.records, signed.key])
  })

  // REC-17, USR-15
  it('says in itself how to check it by hand, and that is enough: hash, signature and chain by node:crypto alone', () => {
    expect(howToVerify.join(' ')).toMatch(/SHA-256 of all bytes before that line.*Ed25519.*RFC 8785.*milliseconds since 1970/)
    const last = signed.text.slice(signed.text.lastIndexOf('\n"proof":') + 1)
    const { content, key, signature } = JSON.parse(last.slice('"proof":'.length, -2)) as Record<string, string>
    expect(createHash('sha256').update(signed.text.slice(0, -last.length)).digest('hex')).toBe(content)
    const x = Buffer.from(key!, 'hex').toString('base64url')
    const said = Buffer.from(`{"content":"${content}","statement":"clearbore record 1"}`)
    const publicKey = createPublicKey({ key: { kty: 'OKP', crv: 'Ed25519', x }, format: 'jwk' })
    expect(verify(null, said, publicKey, Buffer.from(signature!, 'hex'))).toBe(true)
    const lines = signed.text.split('"chain":[\n')[1]!.split('\n],')[0]!.split(',\n')
    const hash = lines.reduce((before, l) => createHash('sha256').update(before).update(l).digest(), Buffer.alloc(32))
    const { trail } = JSON.parse(signed.text) as { trail: { count: number; head: string } }
    expect([lines.length, hash.toString('hex')]).toEqual([trail.count, trail.head])
  })

  it('shows any change of any one byte: 200 drawn anywhere, every byte of its last line among others', async () => {
    const bytes = Buffer.from(signed.text)
    const path = file(bytes)
    const last = signed.text.lastIndexOf('"proof":')
    const lines = Array.from({ length: bytes.length - last }, (_, i) => last + i)
    const drawn = fc.sample(fc.tuple(fc.nat(bytes.length - 1), fc.integer({ min: 1, max: 255 })), 200)
    for (const [at, xor] of [...drawn, ...lines.map((at, i) => [at, 1 << (i % 8)] as const)]) {
      const broken = Buffer.from(bytes)
      broken[at]! ^= xor
      writeFileSync(path, broken)
      expect((await verifyRecord(path)).faults.length, `byte ${at} ^ ${xor}`).toBeGreaterThan(0)
    }
  })

  it('shows bytes put in, taken out, or put behind its end, and lines taken out, doubled or swapped', async () => {
    const { text } = signed
    const path = file('')
    const lines = text.split('\n')
    const at = fc.sample(fc.nat(text.length - 1), 40)
    const line = fc.sample(fc.nat(lines.length - 3), 40)
    const swapped = (i: number): string[] => lines.with(i, lines[i + 1]!).with(i + 1, lines[i]!)
    const all = [
      ...at.map((i) => `${text.slice(0, i)} ${text.slice(i)}`),
      ...at.map((i) => text.slice(0, i) + text.slice(i + 1)),
      ...at.map((i) => text.slice(0, i)),
      ...line.map((i) => lines.toSpliced(i, 1).join('\n')),
      ...line.map((i) => lines.toSpliced(i, 0, lines[i]!).join('\n')),
      ...line.filter((i) => lines[i] !== lines[i + 1]).map((i) => swapped(i).join('\n')),
      `${text}\n`,
      `${text} `,
      `\ufeff${text}`,
      text.replaceAll('\n', '\r\n'),
      text.replace('"key":', '"key":null,"key":'),
      text.replace(/"content":"[0-9a-f]+"/, (m) => m.toUpperCase().replace('CONTENT', 'content')),
    ]
    for (const [i, broken] of all.entries()) {
      writeFileSync(path, broken)
      expect((await verifyRecord(path)).faults.length, `way ${i}`).toBeGreaterThan(0)
    }
  })

  it('cannot be made to fit by who has no key: a proof without a signature, or by another key, is told', async () => {
    const forged = proved(signed.text.replace('note 11', 'note 12'))
    expect((await verifyRecord(file(forged), [signed.key!])).faults.map((f) => f.what)).toContain('the signature')
    const other = sample(true)
    expect((await verifyRecord(file(other.text), [signed.key!])).faults).toMatchObject([
      { what: 'the signature', found: expect.stringContaining('another key') },
    ])
    const proof = JSON.parse(signed.text).proof as { signature: string }
    const kept = proved(signed.text.replace('note 11', 'note 12')).replace(
      '"key":null,"signature":null',
      `"key":"${signed.key}","signature":"${proof.signature}"`,
    )
    expect((await verifyRecord(file(kept))).faults.map((f) => f.found)).toContain(
      'it does not fit the key and the hash in the last line',
    )
  })

  it.each([
    ['an act', (t: string) => t.replace('"text":"note 11"', '"text":"note 12"'), /act 'comment' of demo operator, entry 11/],
    ['a reading', (t: string) => t.replace(/\[(\d+),"111",[-\d.]+,/, '[$1,"111",99,'), /readings, entries 0 to 299/],
    ['a tick', (t: string) => t.replace(/"tick":(\d+)/, (_, n) => `"tick":${Number(n) + 1}`), /readings, entries 0 to 299/],
    [
      'the alarm journal',
      (t: string) => t.replace('"transitions":[{"alarm":1', '"transitions":[{"alarm":2'),
      /alarm dp-limit:R1: act from NORM to UNACK/,
    ],
    ['the words', (t: string) => t.replace('"words":["startup"', '"words":["start-up"'), /first record/],
    ['the skid file', (t: string) => t.replace('skid: heron', 'skid: egret'), /first record/],
    ['a record of the chain', (t: string) => t.replace('"state":"ended"', '"state":"live"'), /the end of the chain/],
    ['the end of the chain', (t: string) => t.replace(/,\n\{[^\n]*\n\],\n"proof"/, '\n],\n"proof"'), /the end of the chain/],
  ])('that is not signed still names %s when its hash was made to fit', async (_, edit, what) => {
    const { text } = sample(false)
    const edited = edit(text)
    expect(edited).not.toBe(text)
    const { faults } = await verifyRecord(file(proved(edited)))
    expect(faults.map((f) => f.what).join('; ')).toMatch(what)
  })

  it('whose chain was made anew throughout is found by a head and count from elsewhere, through the command line', async () => {
    const { text } = sample(false)
    const path = file(text)
    const { count, head } = (JSON.parse(text) as { trail: { count: number; head: string } }).trail
    const parsed = text.split('"chain":[\n')
    const records = parsed[1]!.slice(0, parsed[1]!.indexOf('\n],')).split(',\n').slice(0, -1)
    const newHead = records.reduce((previous: Uint8Array, r) => hashOf(previous, r), nothing) as Buffer
    const forged = file(
      proved(
        text
          .replace(parsed[1]!.slice(0, parsed[1]!.indexOf('\n],')), records.join(',\n'))
          .replace(`"count":${count},"head":"${head}"`, `"count":${count - 1},"head":"${newHead.toString('hex')}"`),
      ),
    )
    expect((await verifyRecord(forged)).faults).toEqual([])
    expect(await cli(['verify', path, '--head', head, '--count', String(count)])).toMatchObject({
      code: 0,
      out: expect.stringContaining('UNTOUCHED'),
    })
    const told = await cli(['verify', forged, '--head', head, '--count', String(count)])
    expect([told.code, told.out]).toEqual([
      1,
      expect.stringContaining(`the chain has only ${count - 1} of ${count} records: its end was cut off`),
    ])
    expect((await cli(['verify', forged, '--against', path])).code).toBe(1)
    expect((await cli(['verify', path, '--against', path])).code).toBe(0)
  })
})

describe('verify', () => {
  it.each([
    [['verify'], 2],
    [['verify', 'a', 'b'], 2],
    [['verify', 'a', '--data', 'b'], 2],
    [['verify', 'a', '--head', '00'], 2],
    [['verify', 'a', '--head', '0'.repeat(64)], 2],
    [['verify', 'a', '--run', '1'], 2],
    [['verify', '/no/such/file'], 1],
    [['verify', '--data', '/no/such/folder'], 3],
  ])('%j ends with %i and one line', async (args, code) => {
    const said = await cli(args)
    expect([said.code, said.out, said.err.trimEnd().split('\n').length]).toEqual([code, '', 1])
  })
  it('of a file that is no record ends with 1 and says so', async () => {
    const said = await cli(['verify', file('time,PT-1\n1,2\n')])
    expect([said.code, said.out]).toEqual([1, expect.stringContaining('NOT UNTOUCHED. First bad record')])
  })
  it('of a signed record prints the fingerprint to compare, and takes the key out of a file', async () => {
    const path = file(signed.text)
    const key = join(newFolder(), 'key.txt')
    writeFileSync(key, `${signed.key}\n`)
    const alone = await cli(['verify', path])
    expect(alone).toMatchObject({ code: 0, err: '' })
    expect(alone.out).toMatch(/key [0-9a-f]{32}: compare this fingerprint with one kept elsewhere/)
    expect((await cli(['verify', path, '--public-key', key])).out).toMatch(/key [0-9a-f]{32}, the one given/)
    writeFileSync(key, '0'.repeat(64))
    expect((await cli(['verify', path, '--public-key', key])).code).toBe(1)
    expect(readFileSync(path, 'utf8')).toBe(signed.text)
  })
})
