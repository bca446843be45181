import { resolve } from 'node:path'
import { loadCommissioning } from '../commissioning-file.ts'
import { importInThread } from '../import-thread.ts'
import { instantOf } from '../ingest/instant.ts'
import { cautions } from '../record/facts.ts'
import { loadSkid } from '../skid/check.ts'
import { readSkidText } from '../skid/skid-path.ts'
import { openStore } from '../store/open.ts'
import { accessOptions, readAccess } from './access-options.ts'
import type { Command, Io } from './command.ts'
import { demoSkidFile, toolVersion, webRoot } from './install.ts'
import { storeOptions, tellSigning } from './key-folder.ts'
import { readOptions, usage, wholeIn } from './options.ts'
import { startServing, type Watched } from './serving.ts'

const defaultPort = 8460

const help = `Usage: clearbore serve [--skid FILE]… [--follow LOG.csv]… [--baseline FILE]… [--data DIR] [--keys DIR] [--port N] [--host H] [--speed N] [--start T]

Watches skids and serves the pages. Without --skid: the demo, the skid "heron" from the simulator, faster than time.

  --skid FILE       a skid file (YAML or JSON); repeatable
  --follow LOG.csv  a log that a data logger is still appending to: the first for the first --skid, and so on;
                    a skid without one runs from the simulator, and the pages say so
  --baseline FILE   the record of a step test (commission --json) that new runs begin with: the first for the first --skid,
                    and so on; it is kept in each run, so that a replay begins alike
  --data DIR        where everything is kept (default .clearbore); runs go on there after a restart
  --keys DIR        where the key lies that signs the record, never in the data folder (default CLEARBORE_KEYS, else
                    this user's state folder)
  --port N          default ${defaultPort}, or the next free one; with --port exactly that one
  --host H          address to listen on (default 127.0.0.1, this machine only); H is then a name it answers to as well
  --tls-cert FILE, --tls-key FILE
                    a certificate and its key (PEM): the pages come over https
  --trust-proxy A,… proxies in front whose word on the caller's address is taken; with --public-url
  --public-url URL  the address that people open where that is no address of this machine: of its name, or of a proxy in front
  --idle MINUTES    a session nobody uses for so long only reads until the next sign-in (default 30)
  --session HOURS   a session ends after so long (default 12)
  --new-administrator-link
                    writes a one-time link that makes an administrator, also where there is one; it is in the audit trail
  --speed N         simulated seconds in a second (default 60)
  --start T         when a followed log with elapsed seconds or bare times of day began

Without --skid everybody at this machine is the demo operator. With --skid the first start writes a link by which the
first administrator is made; until then, and for whoever sits at this machine, pages can be read without signing in.
Beyond this machine it listens only when there is somebody who can sign in.

Ctrl-C or SIGTERM ends it cleanly. Exit code 0; 2 for a wrong command line; 3 when the machine fails (port taken, disk full …).
`

const text = { type: 'string' } as const
const many = { type: 'string', multiple: true } as const

async function watchedOf(
  skids: readonly string[],
  follows: readonly string[],
  baselines: readonly string[],
  speed: number,
  start: string | null,
): Promise<Watched[]> {
  const out: Watched[] = []
  for (const [i, file] of skids.entries()) {
    const content = await readSkidText(file)
    const skid = loadSkid(content, file)
    const path = follows[i]
    const baseline = baselines[i]
    const startMs = start === null ? null : instantOf(start, skid.timeZone, '--start')
    out.push({
      skid,
      file,
      text: content,
      commissioned: baseline === undefined ? null : { file: baseline, known: await loadCommissioning(baseline, skid) },
      source: path === undefined ? { kind: 'simulated', speed } : { kind: 'followed', path: resolve(path), startMs },
    })
  }
  return out
}

export const serveCommand: Command = {
  name: 'serve',
  summary: 'watch skids and serve the pages (the demo without --skid)',
  help,
  async run(args, io) {
    const { values: v } = readOptions(
      'serve',
      args,
      {
        skid: many,
        follow: many,
        baseline: many,
        data: text,
        port: text,
        host: text,
        speed: text,
        start: text,
        keys: text,
        ...accessOptions,
      },
      false,
    )
    const follows = v.follow ?? []
    if (follows.length > (v.skid ?? []).length)
      throw usage(
        'serve',
        `${follows.length} --follow for ${(v.skid ?? []).length} --skid: each followed log needs the skid it belongs to`,
      )
    const baselines = v.baseline ?? []
    if (baselines.length > (v.skid ?? []).length)
      throw usage(
        'serve',
        `${baselines.length} --baseline for ${(v.skid ?? []).length} --skid: each record needs the skid it is of`,
      )
    const isDemo = v.skid === undefined
    const speed = wholeIn('serve', '--speed', v.speed ?? '60', 1, 3600)
    const port = v.port === undefined ? defaultPort : wholeIn('serve', '--port', v.port, 0, 65_535)
    const access = await readAccess(v)
    const watched = await watchedOf(v.skid ?? [demoSkidFile()], follows, baselines, speed, v.start ?? null)
    const ids = watched.map((w) => w.skid.skid)
    const twice = ids.find((id, i) => ids.indexOf(id) !== i)
    if (twice !== undefined) throw usage('serve', `skid '${twice}' is given twice`)

    const store = openStore(v.data ?? '.clearbore', storeOptions(io, v.keys))
    try {
      let fail: (error: unknown) => void = () => undefined
      const fatal = new Promise<never>((_, reject) => {
        fail = reject
      })
      fatal.catch(() => undefined)
      const serving = await startServing({
        store,
        watched,
        isDemo,
        host: v.host ?? '127.0.0.1',
        port,
        tryPorts: v.port === undefined ? 20 : 0,
        webRoot: webRoot(),
        toolVersion: toolVersion(),
        log: (line) => io.err(`${line}\n`),
        onFatal: fail,
        ...(io.program === undefined
          ? {}
          : { importWork: importInThread({ entry: io.program, data: v.data ?? '.clearbore', toolVersion: toolVersion() }) }),
        ...access,
      })
      try {
        await tellSigning(io, store.trail.signing())
        const taken = serving.port === port || port === 0 ? null : port
        await io.out(greeting(serving, watched, taken, access.tls === null && v.host !== undefined))
        await Promise.race([aborted(io), fatal])
      } finally {
        await serving.stop()
      }
    } finally {
      store.close()
    }
    return 0
  },
}

type Greeted = Pick<Awaited<ReturnType<typeof startServing>>, 'url' | 'administratorLink'>
function greeting(
  { url, administratorLink }: Greeted,
  watched: readonly Watched[],
  taken: number | null,
  isPlain: boolean,
): string {
  const lines = watched.map(({ skid, source: s }) =>
    s.kind === 'simulated'
      ? `  ${skid.skid}: simulated, ${s.speed} times faster than time (an invented run, not a plant)`
      : `  ${skid.skid}: follows ${s.path}`,
  )
  return [
    `Clearbore ${toolVersion()}: ${url}`,
    ...(taken === null ? [] : [`  port ${taken} is taken, so this is the next free one`]),
    ...(webRoot() !== null ? [] : ['  the pages have not been built; the API answers under /api (npm run build makes the pages)']),
    ...lines,
    ...(administratorLink === null
      ? []
      : ['  to make an administrator, open this once, within 48 hours:', `  ${administratorLink}`]),
    ...(isPlain && !/^https:|\/\/(127\.|localhost|\[::1\])/.test(url)
      ? ['  passwords cross the network readable: give --tls-cert and --tls-key, or a proxy that speaks https']
      : []),
    ...cautions,
    '',
  ].join('\n')
}

const aborted = (io: Io): Promise<void> =>
  new Promise((done) => {
    if (io.signal.aborted) done()
    else io.signal.addEventListener('abort', () => done(), { once: true })
  })
