import { type ChildProcess, spawn } from 'node:child_process'
import { mkdirSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import { buildSync } from 'esbuild'

const root = join(import.meta.dirname, '../..')
const folder = join(root, 'dist', `e2e-server-${process.pid}`)

/** Bundles a source of the checkout to where its relative paths hold, as the build does. */
export function bundled(source: string): string {
  mkdirSync(folder, { recursive: true })
  const outfile = join(folder, `${source.replaceAll('/', '-').replace(/\.ts$/, '')}.js`)
  buildSync({
    entryPoints: [join(root, source)], outfile, bundle: true, platform: 'node', target: 'node20', format: 'esm', packages: 'external', logLevel: 'error',
  }) // biome-ignore format: a list
  return outfile
}

export const dropBundles = (): void => rmSync(folder, { recursive: true, force: true })

export interface Child {
  readonly process: ChildProcess
  readonly out: string[]
  readonly err: string[]
  /** The first line of stdout that fits; rejects when the process ends before. */
  line(pattern: RegExp): Promise<RegExpMatchArray>
  /** Exit code, or the signal's name. */
  readonly ended: Promise<number | string>
}

/** Starts a program under this Node. */
export function start(file: string, args: readonly string[], cwd?: string): Child {
  const child = spawn(process.execPath, [file, ...args], {
    stdio: ['ignore', 'pipe', 'pipe'],
    ...(cwd === undefined ? {} : { cwd }),
  })
  const out: string[] = []
  const err: string[] = []
  const waiting: { pattern: RegExp; done: (m: RegExpMatchArray) => void }[] = []
  createInterface({ input: child.stdout }).on('line', (line) => {
    out.push(line)
    for (const w of waiting) {
      const m = line.match(w.pattern)
      if (m !== null) w.done(m)
    }
  })
  createInterface({ input: child.stderr }).on('line', (line) => err.push(line))
  const ended = new Promise<number | string>((done) => child.once('close', (code, signal) => done(code ?? signal ?? 'unknown')))
  return {
    process: child,
    out,
    err,
    ended,
    line: (pattern) =>
      new Promise((done, fail) => {
        for (const line of out) {
          const m = line.match(pattern)
          if (m !== null) return done(m)
        }
        waiting.push({ pattern, done })
        void ended.then((code) => fail(new Error(`ended with ${code}: ${err.join('\n')}`)))
      }),
  }
}
