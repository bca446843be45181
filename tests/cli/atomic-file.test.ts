import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { openAtomic, writeAtomic } from '../../server/cli/atomic-file.ts'

const dir = mkdtempSync(join(tmpdir(), 'atomic-'))
afterAll(() => rmSync(dir, { recursive: true }))

describe('a file that appears whole or not at all', () => {
  it('leaves what stood there until it is committed, then holds all 5 MB of 80 pieces, without a warning of leaking listeners', async () => {
    const path = join(dir, 'a.txt')
    writeFileSync(path, 'before')
    const warnings: string[] = []
    const listen = (w: Error) => warnings.push(w.name)
    process.on('warning', listen)
    const file = await openAtomic(path)
    const piece = 'x'.repeat(65_535)
    for (let i = 0; i < 80; i++) await file.write(`${piece}\n`)
    expect(readFileSync(path, 'utf8')).toBe('before')
    await file.commit()
    await new Promise(setImmediate)
    process.off('warning', listen)
    expect(readFileSync(path, 'utf8')).toBe(`${piece}\n`.repeat(80))
    expect(warnings).toEqual([])
    expect(readdirSync(dir)).toEqual(['a.txt'])
  })

  it('leaves nothing when discarded', async () => {
    const file = await openAtomic(join(dir, 'b.txt'))
    await file.write('half')
    await file.discard()
    expect(readdirSync(dir)).toEqual(['a.txt'])
  })

  it('says FILE_WRITE with the path when the folder is not there or the place is a folder', async () => {
    const missing = join(dir, 'no/b.txt')
    await expect(writeAtomic(missing, 'x')).rejects.toMatchObject({ code: 'FILE_WRITE', place: { file: missing } })
    await expect(writeAtomic(dir, 'x')).rejects.toMatchObject({ code: 'FILE_WRITE', place: { file: dir } })
    expect(existsSync(missing)).toBe(false)
  })

  it.runIf(existsSync('/dev/full'))('says DISK_FULL when the disk is full', async () => {
    // A link in the place of the part file sends what is written to a device that is always full.
    const { symlinkSync } = await import('node:fs')
    const path = join(dir, 'full.txt')
    symlinkSync('/dev/full', `${path}.${process.pid}.part`)
    await expect(writeAtomic(path, 'x'.repeat(1 << 20))).rejects.toMatchObject({ code: 'DISK_FULL', place: { file: path } })
    expect(existsSync(path)).toBe(false)
  })
})
