import { isMainThread } from 'node:worker_threads'
import { runCli } from './cli/run.ts'
import { importThread } from './import-thread.ts'

if (isMainThread) await command()
else await importThread()

async function command(): Promise<void> {
  const abort = new AbortController()
  for (const name of ['SIGINT', 'SIGTERM'] as const) process.once(name, () => abort.abort())
  // A reader that went away (`| head`) is no error of ours.
  process.stdout.on('error', (e: NodeJS.ErrnoException) => {
    if (e.code === 'EPIPE') process.exit(0)
  })

  process.exitCode = await runCli(process.argv.slice(2), {
    out: (text) =>
      new Promise((done, fail) => {
        process.stdout.write(text, (e) => (e ? fail(e) : done()))
      }),
    err: (text) => {
      process.stderr.write(text)
    },
    errIsTerminal: process.stderr.isTTY === true,
    outIsTerminal: process.stdout.isTTY === true,
    nowMs: () => performance.now(),
    env: process.env,
    signal: abort.signal,
    program: new URL(import.meta.url),
  })
}
