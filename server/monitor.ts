import { MonitorError } from './core/errors.ts'
import type { Act, Entry } from './core/sequence.ts'
import { askedBy } from './core/sim/operator.ts'
import type { Skid } from './core/skid.ts'
import type { Polled, Source } from './ingest/source.ts'
import { actOf } from './monitor/act.ts'
import { type ChangeBody, decideChange, isChange } from './monitor/change.ts'
import { createEngine, type Engine, type News } from './monitor/engine.ts'
import { engineState } from './monitor/live-state.ts'
import type { MonitorStore } from './monitor/needs.ts'
import type { Json, RunId } from './store/keys.ts'
import type { ActBody, ActReply } from './wire/act.ts'
import type { LiveState } from './wire/live.ts'

/** Who is told what happened, once it is on disk. */
export interface Publisher {
  news(run: RunId, state: LiveState, news: News): void
  /** A run began, ended, or its source's state changed. */
  runs(): void
}

export interface MonitorOptions {
  readonly store: MonitorStore
  readonly steadyMs: () => number
  /** One line for the log of the process. */
  readonly log: (line: string) => void
  /** The disk is full or failed for `giveUpMs`, or a fault that no retry mends: the process should end with this error. */
  readonly onFatal: (error: unknown) => void
  readonly snapshotMs?: number
  readonly giveUpMs?: number
}

export type LiveRun = { readonly run: RunId; readonly stepsRun: RunId; readonly skid: Skid; readonly source: Source }

interface Live extends LiveRun {
  readonly engine: Engine
  /** Polled and not yet on disk. */
  waiting: Polled | null
  /** In the engine and not yet journalled and told. */
  untold: boolean
  sourceState: string
  /** Why the analysis of this run stopped; its readings are recorded all the same, and other runs go on. */
  broken: string | null
}

const passing = new Set(['DISK_FULL', 'STORE_LOCKED'])

/**
 * The loop of all live runs. A beat asks every source, commits what came in one transaction for all, lets the pipelines take it,
 * journals what they said in another, and only then publishes: nothing is shown that is not on disk. Acts of people go the same way,
 * each at once. A full disk stops the intake, keeps what was polled, is told, and is tried again until `giveUpMs`.
 */
export function createMonitor({ store, steadyMs, log, onFatal, snapshotMs = 60_000, giveUpMs = 30_000 }: MonitorOptions) {
  const lives = new Map<RunId, Live>()
  const publishers: Publisher[] = []
  let faultSince: number | null = null
  let fault: string | null = null
  let snapshotAt = steadyMs()
  let timer: NodeJS.Timeout | null = null
  let beating: Promise<boolean> = Promise.resolve(false)
  let stopped = false
  const ended: ((live: LiveRun) => void)[] = []

  const stateOfLive = (live: Live): LiveState => {
    const said = fault !== null ? `not recording: ${fault}` : live.broken
    const source = said === null ? live.source.status() : { state: 'failed' as const, message: said }
    return engineState(live.engine, live.source.clock(), source, live.source.usualGapS())
  }

  function tell(live: Live, news: News): void {
    const state = stateOfLive(live)
    for (const p of publishers) p.news(live.run, state, news)
    const source = `${state.data.source.state} ${state.data.source.message ?? ''}`
    if (source !== live.sourceState) {
      live.sourceState = source
      if (state.data.source.state === 'failed' && fault === null)
        log(`run ${live.run}: ${state.data.source.message ?? 'its source failed'}`)
      for (const p of publishers) p.runs()
    }
  }

  /** Entries are appended, so the engine may take them. */
  function take(live: Live, entries: readonly Entry[]): void {
    live.untold = true
    if (live.broken !== null) return
    try {
      live.engine.push(entries)
    } catch (error) {
      live.broken = `the analysis failed after entry ${live.engine.seq()}; readings are still recorded`
      log(`run ${live.run}: ${live.broken}: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}`)
    }
  }

  /** Writes what the engines said and gives it to the publishers. */
  function journalAndTell(some: readonly Live[]): void {
    store.together(() => {
      for (const live of some) if (live.untold) live.engine.journal()
    })
    for (const live of some) {
      const news = live.engine.news()
      live.untold = false
      tell(live, news)
    }
  }

  function failed(error: unknown): void {
    if (!(error instanceof MonitorError) || !passing.has(error.code)) throw error
    if (fault === null) log(error.line())
    fault = error.message
    faultSince ??= steadyMs()
    for (const live of lives.values()) tell(live, { steps: [], readings: null, alarms: [], acts: [], transitions: [] })
    if (steadyMs() - faultSince >= giveUpMs) throw error
  }

  async function beatOnce(): Promise<boolean> {
    const all = [...lives.values()]
    for (const live of all) live.waiting ??= await live.source.poll()
    if (stopped) return false
    const batch = all.filter((l) => l.waiting !== null && (l.waiting.entries.length > 0 || l.waiting.state !== undefined))
    try {
      if (batch.length > 0)
        store.sequence.append(
          batch.map(({ run, waiting }) => {
            const { entries, words, state } = waiting!
            return { run, entries, ...(words ? { words } : {}), ...(state === undefined ? {} : { sourceState: state }) }
          }),
        )
      const more = all.some((l) => l.waiting?.more === true)
      const over = all.filter((l) => l.waiting?.ended === true)
      for (const live of batch) {
        const { entries } = live.waiting!
        live.waiting = null
        take(live, entries)
      }
      for (const live of all) live.waiting = null
      journalAndTell(all)
      for (const live of over) end(live)
      if (fault !== null) log('recording again')
      fault = null
      faultSince = null
      if (steadyMs() - snapshotAt >= snapshotMs) snapshot()
      store.upkeep({ maxMs: 20 })
      return more
    } catch (error) {
      failed(error)
      return false
    }
  }

  function snapshot(): void {
    snapshotAt = steadyMs()
    for (const live of lives.values()) if (!live.untold && live.broken === null) live.engine.save()
  }

  /** The run is over: its last scans close, its report stands. */
  function end(live: Live): void {
    if (live.broken === null) {
      live.engine.finish()
      live.untold = true
      journalAndTell([live])
      live.engine.save()
    }
    store.runs.setState(live.run, 'ended')
    store.runs.setState(live.stepsRun, 'ended')
    lives.delete(live.run)
    void live.source.close()
    for (const p of publishers) p.runs()
    for (const act of ended) act(live)
  }

  /** One beat; beats never overlap. Resolves to whether a source has more waiting. */
  function beat(): Promise<boolean> {
    beating = beating.then(beatOnce, beatOnce)
    return beating
  }

  /** Judges an act and puts it on disk, with the version that a change of settings makes. What is refused is kept in the audit trail. */
  function recorded(live: Live, body: ActBody | ChangeBody): { act: Act; seq: number } {
    const { nowMs } = live.source.clock()
    try {
      return store.together(() => {
        const act = isChange(body) ? decideChange(store, live.engine, body, nowMs) : actOf(body, live.skid, nowMs)
        const seq = store.sequence.append([{ run: live.run, entries: [{ kind: 'act', act }] }])[0]! - 1
        return { act, seq }
      })
    } catch (error) {
      if (error instanceof MonitorError && (error.code === 'ACT_REFUSED' || error.code === 'TAG_UNKNOWN')) {
        const asked = JSON.parse(JSON.stringify(body)) as Json
        store.audit.append({
          tMs: nowMs,
          person: body.person,
          act: isChange(body) ? 'settings.refused' : 'run.refused',
          reason: error.message,
          body: asked,
          run: live.run,
        })
      }
      throw error
    }
  }

  const need = (run: number): Live => {
    const live = lives.get(run as RunId)
    if (live === undefined)
      throw new MonitorError('RUN_ENDED', `run ${run} is not live`, { hint: 'acts belong to a run while it lives' })
    return live
  }

  return {
    /** A run that lives from now on: a new one, or one that a process before this one left; it goes on where it stood. */
    add(live: LiveRun): void {
      const engine = createEngine({ skid: live.skid, store, run: live.run, stepsRun: live.stepsRun })
      followFlush(live.source, engine)
      lives.set(live.run, { ...live, engine, waiting: null, untold: true, sourceState: '', broken: null })
      for (const p of publishers) p.runs()
    },
    publishTo: (p: Publisher): void => {
      publishers.push(p)
    },
    onEnded: (act: (live: LiveRun) => void): void => {
      ended.push(act)
    },
    beat,
    /** Ends a live run by hand. */
    async end(run: number): Promise<void> {
      await beat()
      end(need(run))
    },
    /** Beats each `beatMs`, and at once while a source has more waiting. */
    start(beatMs = 1000): void {
      const round = async (): Promise<void> => {
        const began = steadyMs()
        let more = false
        try {
          more = await beat()
        } catch (error) {
          stopped = true
          onFatal(error)
        }
        if (!stopped) timer = setTimeout(round, more ? 0 : Math.max(0, beatMs - (steadyMs() - began)))
      }
      timer = setTimeout(round, 0)
    },
    /** Commits what was polled, saves where every run stands, closes the sources. */
    async stop(): Promise<void> {
      stopped = true
      if (timer !== null) clearTimeout(timer)
      await beating.catch(() => undefined)
      try {
        const told = [...lives.values()].filter((l) => l.untold)
        if (told.length > 0) journalAndTell(told)
        snapshot()
      } finally {
        for (const live of lives.values()) await live.source.close()
      }
    },
    lives: (): LiveRun[] => [...lives.values()],
    engine: (run: number): Engine | null => lives.get(run as RunId)?.engine ?? null,
    state: (run: number): LiveState => stateOfLive(need(run)),
    clock: (run: number) => need(run).source.clock(),
    /** What a person does: on disk, in the pipeline, journalled and told before it returns. Errors: RUN_ENDED, ACT_REFUSED, TAG_UNKNOWN, DISK_FULL. */
    act(run: number, body: ActBody | ChangeBody): ActReply {
      const live = need(run)
      const { act, seq } = recorded(live, body)
      take(live, [{ kind: 'act', act }])
      if (act.kind === 'flush-step' || act.kind === 'flush-check') followFlush(live.source, live.engine)
      store.together(() => live.engine.journal())
      const news = live.engine.news()
      live.untold = false
      tell(live, news)
      return { seq, act, transitions: news.transitions }
    },
  }
}
/** A simulated skid does what has been confirmed; told again at a restart, for what was not on disk with its rows. */
function followFlush(source: Source, engine: Engine): void {
  const flush = engine.pipeline.view().flush
  if (flush !== null && source.follow !== undefined) source.follow(askedBy(flush.course))
}

export type Monitor = ReturnType<typeof createMonitor>
