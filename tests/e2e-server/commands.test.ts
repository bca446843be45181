import { chmodSync, writeFileSync } from 'node:fs'
import { createServer } from 'node:net'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { runCli } from '../../server/cli/run.ts'
import type { RunRow } from '../../server/wire/index.ts'
import { openPage } from '../live/page.ts'
import { heronFile, tempDir } from '../monitor/bench.ts'
import { bundled, dropBundles, start } from './children.ts'

let main = ''
beforeAll(() => {
  main = bundled('server/main.ts')
})
afterAll(dropBundles)

/** Runs a command to its end. */
async function run(...args: string[]) {
  const child = start(main, args)
  const code = await child.ended
  return { code, out: child.out.join('\n'), err: child.err.join('\n') }
}
const serve = (...args: string[]) => start(main, ['serve', ...args])
const url = /^Clearbore \S+: (http:\S+)/

/** The same in this process, for what ends before anything is opened. */
async function here(...args: string[]) {
  const said = { out: '', err: '' }
  const code = await runCli(args, {
    out: async (text) => {
      said.out += text
    },
    err: (text) => {
      said.err += text
    },
    errIsTerminal: false,
    outIsTerminal: false,
    nowMs: () => 0,
    signal: new AbortController().signal,
  })
  return { code, ...said }
}

/** Holds a port of the machine until the test ends. */
async function holdPort(port = 0): Promise<{ port: number; free: () => void }> {
  const server = createServer()
  await new Promise<void>((done, fail) => server.once('error', fail).listen(port, '127.0.0.1', done))
  return { port: (server.address() as { port: number }).port, free: () => server.close() }
}

describe('serve', () => {
  it.each(['SIGTERM', 'SIGINT'] as const)(
    'runs the demo, says where and that it is invented, and ends with 0 on %s; its second start goes on with the same run',
    async (signal) => {
      const data = tempDir()
      const first = serve('--data', data, '--port', '0', '--speed', '600')
      const [, at] = await first.line(url)
      const runs = async (base: string) => (await (await fetch(`${base}api/runs`)).json()) as RunRow[]
      while (((await runs(at!))[0]?.rows ?? 0) < 300) await new Promise((done) => setTimeout(done, 50))
      // An open page does not hold it up.
      const page = await openPage(Number(new URL(at!).port))
      const news = page.next('delta')
      page.send({ type: 'subscribe', run: 1, topics: ['state'], sinceMs: null })
      await news
      const closed = page.closed()
      const told = performance.now()
      first.process.kill(signal)
      expect(await first.ended).toBe(0)
      expect(await closed).toBe(1001)
      expect(performance.now() - told).toBeLessThan(5000)
      expect(first.out.join('\n')).toMatch(/simulated, 600 times faster than time \(an invented run/)
      expect(first.out.join('\n')).toMatch(/Advisory only/)
      expect(first.err).toEqual([])
      const began = performance.now()
      const second = serve('--data', data, '--port', '0', '--speed', '600')
      const [, again] = await second.line(url)
      expect(performance.now() - began).toBeLessThan(8000)
      const rows = await runs(again!)
      expect(rows.map((r) => [r.run, r.state, r.kind, r.clock?.speed])).toEqual([[1, 'live', 'simulated', 600]])
      expect(rows[0]!.rows).toBeGreaterThanOrEqual(300)
      second.process.kill(signal)
      expect(await second.ended).toBe(0)
    },
  )

  it('takes the next free port where none was asked for, and says so', async () => {
    const held = await holdPort(8460).catch(() => null)
    const child = serve('--data', tempDir())
    const [, at] = await child.line(url)
    expect(Number(new URL(at!).port)).toBeGreaterThan(8460)
    await child.line(/port 8460 is taken/)
    child.process.kill('SIGTERM')
    expect(await child.ended).toBe(0)
    held?.free()
  })
})

describe('what the machine refuses: one line, what to do, exit code 3', () => {
  const oneLine = (r: { code: number | string; err: string }, says: RegExp): void => {
    expect(r.code).toBe(3)
    expect(r.err.split('\n').length).toBe(1)
    expect(r.err).toMatch(says)
  }

  it('a port that is taken', async () => {
    const held = await holdPort()
    oneLine(await run('serve', '--data', tempDir(), '--port', String(held.port)), /port \d+ on 127\.0\.0\.1 is taken.*--port/)
    held.free()
  })
  it('two servers on one store', async () => {
    const data = tempDir()
    const first = serve('--data', data, '--port', '0')
    await first.line(url)
    oneLine(await run('serve', '--data', data, '--port', '0'), /in use by another process.*--data/)
    oneLine(await run('import', heronFile, '--skid', heronFile, '--data', data), /in use by another process/)
    first.process.kill('SIGTERM')
    await first.ended
  })
  it('a data folder that is a file, or below one', async () => {
    const file = join(tempDir(), 'file')
    writeFileSync(file, '')
    for (const data of [file, join(file, 'below')]) oneLine(await run('serve', '--data', data, '--port', '0'), /store.*--data/)
  })
  it('a data folder that may not be written', async () => {
    // The root user may write anywhere but where the kernel itself refuses.
    const isRoot = process.getuid?.() === 0
    const dir = isRoot ? '/sys' : tempDir()
    if (!isRoot) chmodSync(dir, 0o500)
    oneLine(await run('serve', '--data', join(dir, 'clearbore'), '--port', '0'), /cannot open the store.*permissions.*--data/)
    if (!isRoot) chmodSync(dir, 0o700)
  })
  it('a store from a newer version', async () => {
    const data = tempDir()
    const child = serve('--data', data, '--port', '0')
    await child.line(url)
    child.process.kill('SIGTERM')
    await child.ended
    const db = new Database(join(data, 'clearbore.db'))
    db.pragma('user_version = 9999')
    db.close()
    oneLine(await run('serve', '--data', data, '--port', '0'), /newer/)
  })
})

describe('what the command line refuses: exit code 2', () => {
  it.each([
    ['an unknown option', ['serve', '--prot', '1'], /did you mean '--port'/],
    ['a log without a skid', ['serve', '--follow', 'log.csv'], /--follow/],
    ['a speed that is no number', ['serve', '--speed', 'fast'], /--speed needs a whole number/],
    ['an import without a skid', ['import', 'log.csv'], /--skid/],
    ['an export without a kind', ['export', '1', '--format', 'csv', '--out', 'x'], /--what/],
    ['an export as PDF', ['export', '1', '--what', 'alarms', '--format', 'pdf', '--out', 'x'], /no PDF yet/],
    ['readings as JSON', ['export', 'one', '--what', 'samples', '--format', 'csv', '--out', 'x'], /RUN needs a whole number/],
  ])('%s', async (_, args, says) => {
    const r = await here(...args)
    expect([r.code, r.out]).toEqual([2, ''])
    expect(r.err).toMatch(says)
  })
})
