import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { fileURLToPath } from 'node:url'

export const root = fileURLToPath(new URL('../..', import.meta.url))
const main = fileURLToPath(new URL('../../dist/server/main.js', import.meta.url))

export interface ServerProcess {
  readonly url: string
  readonly port: number
  readonly child: ChildProcess
  /** Everything it wrote so far. */
  said(): string
  /** Sends a signal and waits for the end; gives the exit code, null after a kill. */
  stop(signal: NodeJS.Signals): Promise<number | null>
}

/** The real server as a process of its own: `clearbore serve` with the options given, once it has told its address. */
export async function startServer(options: readonly string[]): Promise<ServerProcess> {
  const child = spawn(process.execPath, [main, 'serve', ...options], { cwd: root, stdio: ['ignore', 'pipe', 'pipe'] })
  let text = ''
  const url = await new Promise<string>((found, failed) => {
    const take = (chunk: Buffer) => {
      text += chunk.toString()
      const at = /http:\/\/127\.0\.0\.1:(\d+)\//.exec(text)
      if (at !== null) found(at[0])
    }
    child.stdout.on('data', take)
    child.stderr.on('data', take)
    child.once('exit', (code) => failed(new Error(`the server ended with ${code}: ${text}`)))
  })
  return {
    url,
    port: Number(new URL(url).port),
    child,
    said: () => text,
    async stop(signal) {
      if (child.exitCode !== null || child.signalCode !== null) return child.exitCode
      const ended = once(child, 'exit')
      child.kill(signal)
      const [code] = (await ended) as [number | null]
      return code
    },
  }
}

/** One command of the tool, run to its end; its standard output. */
export async function command(args: readonly string[]): Promise<string> {
  const child = spawn(process.execPath, [main, ...args], { cwd: root, stdio: ['ignore', 'pipe', 'pipe'] })
  let out = ''
  let err = ''
  child.stdout.on('data', (c: Buffer) => {
    out += c.toString()
  })
  child.stderr.on('data', (c: Buffer) => {
    err += c.toString()
  })
  const [code] = (await once(child, 'close')) as [number | null]
  if (code !== 0) throw new Error(`${args.join(' ')} ended with ${code}: ${err}`)
  return out
}
