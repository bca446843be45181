import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { checkSkidCommand, checkSkidWith } from '../../server/cli/check-skid.ts'
import type { Command, Io } from '../../server/cli/command.ts'

const dir = mkdtempSync(join(tmpdir(), 'check-skid-'))
afterAll(() => rmSync(dir, { recursive: true, force: true }))

const put = (name: string, content: string | Uint8Array): string => {
  writeFileSync(join(dir, name), content)
  return join(dir, name)
}

async function run(
  args: readonly string[],
  command: Command = checkSkidCommand,
): Promise<{ code: number; out: string; err: string }> {
  let [out, err] = ['', '']
  const io: Io = {
    out: async (text) => {
      out += text
    },
    err: (text) => {
      err += text
    },
    errIsTerminal: false,
    outIsTerminal: false,
    nowMs: () => 0,
    signal: new AbortController().signal,
  }
  const code = await command.run(args, io)
  return { code, out, err }
}

const heron = 'fixtures/skids/heron.yaml'

describe('check-skid', () => {
  it('prints each mistake as FILE:line:column: found; expected; mend on stderr, then the count, and exits 1', async () => {
    const file = put('bad.yaml', 'skid: a b\ntags: []\nstream: []\nsegments: 5\n')
    expect(await run([file])).toEqual({
      code: 1,
      out: '',
      err: [
        `${file}:1:7: skid is the text 'a b'; expected letters, digits and '-'; for example 'a-b'`,
        `${file}:2:7: tags has 0 entries; expected a list of tags, at least 1`,
        `${file}:3:1: unknown key 'stream'; expected one of skid, title, timeZone, scanSeconds, lateSeconds, phaseColumn, log, detection, tags, streams, segments, alarms, suppression, disturbances; did you mean 'streams'?`,
        `${file}:4:11: segments is 5; expected a list of segments; in brackets, even when there is one: [ … ]`,
        `${file}: 4 mistakes`,
        '',
      ].join('\n'),
    })
  })

  it('prints notes for a good file on stdout and exits 0; then the page of derived figures where one is given', async () => {
    const plain = await run([heron], checkSkidWith())
    expect(plain).toEqual({
      code: 0,
      out: `${heron}: no mistakes\n  note: accuracyPct is not given on 12 of 23 tags: 0.25 % of span is assumed\n`,
      err: '',
    })
    const paged = await run([heron], checkSkidWith({ derivedPage: (skid) => `${skid.segments.length} segments` }))
    expect(paged.out).toBe(`${plain.out}\n6 segments\n`)
  })

  it('a file that is missing, a folder, binary, too large: exit 1 and one line', async () => {
    const missing = join(dir, 'none.yaml')
    expect(await run([missing])).toEqual({
      code: 1,
      out: '',
      err: `${missing}: the skid file cannot be read: there is no such file; give the path of a skid file, YAML or JSON\n`,
    })
    expect((await run([dir])).err).toContain('is a folder')
    const binary = await run([put('a.bin', Uint8Array.from([0x73, 0x0a, 0x00, 0xff, 0xfe]))])
    expect(binary.code).toBe(1)
    expect(binary.err).toContain('a.bin:2:1: not a text file: character U+0000')
    expect((await run([put('large.yaml', '#'.repeat(3_000_000))])).err).toContain('larger than 1 MB')
  })

  it('reads UTF-16 with its mark', async () => {
    const file = put('wide.yaml', Buffer.from('\ufeffskid: 5 5\n', 'utf16le'))
    expect((await run([file])).err).toContain("wide.yaml:1:7: skid is the text '5 5'")
  })

  it('a wrong command line exits 2 with one line; --help exits 0', async () => {
    for (const args of [[], ['a', 'b'], ['--json', 'a']]) {
      const { code, out, err } = await run(args)
      expect([code, out, err.split('\n').length]).toEqual([2, '', 2])
      expect(err).toContain('usage: clearbore check-skid FILE')
    }
    for (const flag of ['--help', '-h']) {
      const { code, out, err } = await run([flag])
      expect([code, err]).toEqual([0, ''])
      expect(out).toBe(checkSkidCommand.help)
    }
  })
})
