import { networkInterfaces } from 'node:os'
import { basename } from 'node:path'
import { buildApp } from '../app.ts'
import type { StartingKnowledge } from '../core/baseline/starting-knowledge.ts'
import { MonitorError } from '../core/errors.ts'
import type { Act } from '../core/sequence.ts'
import { demoScenario } from '../core/sim/demo.ts'
import type { Skid } from '../core/skid.ts'
import { exportRun } from '../export-run.ts'
import { linkPath } from '../http/people.ts'
import type { ImportWork } from '../import-task.ts'
import { createImports } from '../imports.ts'
import { followSource } from '../ingest/follow.ts'
import { simulatedSource } from '../ingest/simulated.ts'
import type { Source } from '../ingest/source.ts'
import { createCatalogue, createPair, kindOf } from '../monitor/catalogue.ts'
import { createMonitor } from '../monitor.ts'
import { createPeople, type PeopleOptions } from '../people/people.ts'
import { carriedEntries } from '../settings/carried.ts'
import { createVersions } from '../settings/versions.ts'
import { loadSkid } from '../skid/check.ts'
import type { RunId } from '../store/keys.ts'
import type { Store } from '../store/open.ts'

/** A skid to be watched and where its readings come from. */
export interface Watched {
  readonly skid: Skid
  readonly file: string
  readonly text: string
  /** An accepted step test that new runs begin with. */
  readonly commissioned?: { readonly file: string; readonly known: readonly StartingKnowledge[] } | null
  readonly source:
    | { readonly kind: 'simulated'; readonly speed: number }
    | { readonly kind: 'followed'; readonly path: string; readonly startMs: number | null }
}

export interface ServingOptions {
  readonly store: Store
  readonly watched: readonly Watched[]
  readonly isDemo: boolean
  readonly host: string
  readonly port: number
  /** Further ports to try where the first is taken. */
  readonly tryPorts: number
  readonly webRoot: string | null
  readonly toolVersion: string
  readonly log: (line: string) => void
  readonly onFatal: (error: unknown) => void
  /** Does imports of pages; left out, they share this thread. */
  readonly importWork?: ImportWork
  readonly tls?: { readonly cert: string; readonly key: string } | null
  /** Proxies in front, and the address they are known by. */
  readonly trustProxy?: readonly string[]
  readonly publicUrl?: string | null
  /** Writes a link for an administrator also where there is one, and in the demo. */
  readonly newAdministrator?: boolean
  readonly people?: Pick<PeopleOptions, 'hasher' | 'idleMs' | 'sessionMs'>
  readonly beatMs?: number
  readonly snapshotMs?: number
  readonly giveUpMs?: number
}

const nightMs = 24 * 3_600_000

/** Everything of a running server put together: store, monitor, imports, pages. Resolves once it listens. Errors: USAGE (would be reached from outside with nobody to sign in), PORT_TAKEN, those of the sources' skids. */
export async function startServing(o: ServingOptions) {
  const { store } = o
  const steadyMs = () => performance.now()
  const wallMs = () => Date.now()
  const people = createPeople({ store, wallMs, ...o.people })
  const { publicUrl = null, trustProxy = [] } = o
  const isLoopback = ['127.0.0.1', 'localhost', '::1'].includes(o.host)
  const isOutside = !isLoopback || publicUrl !== null || trustProxy.length > 0
  if (isOutside && !people.any())
    throw new MonitorError('USAGE', 'others would reach this server, and there is nobody yet who could sign in', {
      hint: 'start it once for this machine only (without --host, --public-url, --trust-proxy) with --new-administrator-link and the same --data, open the link it writes, then start it as you wish',
    })
  const strangers = people.strangers()
  if (strangers.length > 0)
    o.log(`people in the store are not as the audit trail tells: ${strangers.join(', ')}; look into it before you trust them`)
  const monitor = createMonitor({
    store,
    steadyMs,
    log: o.log,
    onFatal: o.onFatal,
    ...(o.snapshotMs === undefined ? {} : { snapshotMs: o.snapshotMs }),
    ...(o.giveUpMs === undefined ? {} : { giveUpMs: o.giveUpMs }),
  })
  let changed = (): void => undefined
  const imports = createImports({
    store,
    skidOf: loadSkid,
    toolVersion: o.toolVersion,
    wallMs,
    log: o.log,
    changed: () => changed(),
    ...(o.importWork === undefined ? {} : { work: o.importWork }),
  })
  const catalogue = createCatalogue(store, loadSkid, {
    engine: monitor.engine,
    clock: monitor.clock,
    sourceFault: (run) => {
      const { state, message } = monitor.state(run).data.source
      return state === 'failed' ? message : null
    },
    importing: imports.busy,
  })

  function sourceOf(w: Watched, run: RunId): Source {
    const state = store.sequence.sourceState(run)
    if (w.source.kind === 'followed') {
      const { path, startMs } = w.source
      return followSource({ skid: w.skid, path, startMs, wallMs, steadyMs, state, words: store.runs.words(run) })
    }
    const night = (state as { night?: number } | null)?.night ?? 0
    const tonight = demoScenario(w.skid)
    const scenario = demoScenario(w.skid, { seed: tonight.seed + night, fromMs: tonight.fromMs + night * nightMs })
    return simulatedSource({ skid: w.skid, scenario, speed: w.source.speed, steadyMs, state })
  }

  function begin(w: Watched): RunId {
    const earlier = store.runs.list().filter((r) => r.skidId === w.skid.skid && kindOf(r.source) === 'simulated').length
    const isSimulated = w.source.kind === 'simulated'
    const { run } = createPair(store, {
      kind: w.source.kind,
      about: w.source.kind === 'followed' ? w.source.path : 'simulated readings',
      skidId: w.skid.skid,
      title: isSimulated ? `${w.skid.title}, simulated night ${earlier + 1}` : w.skid.title,
      skidFile: w.file,
      skidText: w.text,
      startedMs: wallMs(),
      toolVersion: o.toolVersion,
      state: 'live',
    })
    if (isSimulated) store.sequence.append([{ run, entries: [], sourceState: { night: earlier, rows: 0 } }])
    return run
  }

  /** The run that a process before this one left alive with the same skid file and source. */
  function left(w: Watched): RunId | null {
    const about = w.source.kind === 'followed' ? w.source.path : 'simulated readings'
    const same = store.runs.list().filter((r) => r.state === 'live' && r.source === `${w.source.kind}: ${about}`)
    return same.findLast((r) => store.runs.get(r.id).skidText === w.text)?.id ?? null
  }

  const beginsWith = (w: Watched, tMs: number): Act[] =>
    w.commissioned == null
      ? []
      : [
          {
            kind: 'commissioned',
            tMs,
            person: 'clearbore serve',
            known: w.commissioned.known,
            reason: `step test ${basename(w.commissioned.file)}`,
          },
        ]

  const versions = createVersions(store, loadSkid)
  /** Water results of the run before that still hold. */
  function carriedTo(run: RunId, w: Watched, tMs: number) {
    const isWatched = (source: string) => ['simulated', 'followed'].includes(kindOf(source))
    const before = store.runs.list().findLast((r) => r.id < run && r.skidId === w.skid.skid && isWatched(r.source))
    return before === undefined ? [] : carriedEntries(w.skid, before.id, store.sequence.acts(before.id), tMs)
  }

  const watchedOf = new Map<RunId, Watched>()
  function watch(w: Watched, run: RunId): void {
    const { stepsRun } = catalogue.parts(run)
    watchedOf.set(run, w)
    const source = sourceOf(w, run)
    // A new run begins with the settings in force: the version of its file and what was changed since.
    const isNew = store.sequence.count(run).entries === 0
    const { nowMs } = source.clock()
    const opening: Act[] = isNew
      ? [...versions.opening(w.skid.skid, nowMs), ...beginsWith(w, nowMs), ...carriedTo(run, w, nowMs)]
      : []
    if (opening.length > 0) store.sequence.append([{ run, entries: opening.map((act) => ({ kind: 'act', act })) }])
    monitor.add({ run, stepsRun, skid: w.skid, source })
  }
  monitor.onEnded(({ run }) => {
    const w = watchedOf.get(run)
    if (w?.source.kind === 'simulated') watch(w, begin(w))
  })
  for (const w of o.watched) {
    versions.loaded(w.skid, { name: w.file, text: w.text }, wallMs())
    const run = left(w)
    try {
      watch(w, run ?? begin(w))
    } catch (error) {
      // A run that cannot be taken up again must not keep its skid from being watched.
      const isStore = error instanceof MonitorError && /^(STORE|DISK)_/.test(error.code)
      if (run === null || isStore) throw error
      o.log(`run ${run} cannot be taken up again, a new one begins: ${error instanceof Error ? error.stack : String(error)}`)
      watch(w, begin(w))
    }
  }

  const { app, hub, publisher } = await buildApp({
    store,
    monitor,
    catalogue,
    toolVersion: o.toolVersion,
    people,
    isDemo: () => o.isDemo && !isOutside,
    openReading: !isOutside,
    tls: o.tls ?? null,
    trustProxy,
    publicUrl,
    wallMs,
    uploadMaxBytes: 512 * 2 ** 20,
    exportRun,
    skidOf: loadSkid,
    importLogs: (job) => catalogue.row(imports.begin(job)),
    webRoot: o.webRoot,
    hosts: isLoopback ? [] : [o.host],
    log: o.log,
  })
  monitor.publishTo(publisher)
  changed = publisher.runs

  const port = await listen(o, (port) => app.listen({ host: o.host, port })).catch(async (error) => {
    await app.close()
    await monitor.stop()
    throw error
  })
  monitor.start(o.beatMs)
  const mayMake = o.newAdministrator === true || (!o.isDemo && !people.any())
  const link = mayMake ? linkPath(people.administratorLink()) : null
  const shown = isLoopback ? o.host : o.host === '0.0.0.0' || o.host === '::' ? (ownAddress() ?? o.host) : o.host
  const scheme = o.tls == null ? 'http' : 'https'
  const url = publicUrl ?? `${scheme}://${shown.includes(':') ? `[${shown}]` : shown}:${port}/`
  return {
    port,
    url,
    /** Makes an administrator, once; for the console and nowhere else. */
    administratorLink: link === null ? null : new URL(link, url).href,
    monitor,
    imports,
    counts: hub.counts,
    /** Clients are let go, what was polled is committed, every run's place saved. The store stays open. */
    async stop(): Promise<void> {
      await app.close()
      await imports.stop()
      await monitor.stop()
    },
  }
}

const ownAddress = (): string | null =>
  Object.values(networkInterfaces())
    .flat()
    .find((a) => a !== undefined && !a.internal && a.family === 'IPv4')?.address ?? null

async function listen(o: ServingOptions, bind: (port: number) => Promise<string>): Promise<number> {
  for (let port = o.port; ; port++) {
    try {
      const address = await bind(port)
      return Number(new URL(address).port || 80)
    } catch (cause) {
      const { code, message } = cause as NodeJS.ErrnoException
      if (code === 'EADDRINUSE' && port < o.port + o.tryPorts) continue
      if (code === 'EADDRINUSE')
        throw new MonitorError('PORT_TAKEN', `port ${port} on ${o.host} is taken by another program`, {
          hint: 'stop that one, or choose another with --port',
          cause,
        })
      if (code === 'EACCES')
        throw new MonitorError('PORT_TAKEN', `port ${port} may not be used by this user`, {
          hint: 'choose one above 1023 with --port',
          cause,
        })
      throw new MonitorError('PORT_TAKEN', `cannot listen on ${o.host} port ${port}: ${message}`, {
        hint: 'check --host and --port',
        cause,
      })
    }
  }
}
