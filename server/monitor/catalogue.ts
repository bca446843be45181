import { MonitorError } from '../core/errors.ts'
import type { PipelineEvent } from '../core/pipeline/events.ts'
import type { Skid } from '../core/skid.ts'
import type { RunId } from '../store/keys.ts'
import type { NewRun, RunSummary } from '../store/runs.ts'
import type { RunKind, RunRow } from '../wire/run.ts'
import type { RunClock } from '../wire/service.ts'
import type { Engine } from './engine.ts'
import type { MonitorStore } from './needs.ts'
import { isSteps, stepsTitle } from './step-log.ts'
import { alarmsAt } from './stored-state.ts'
import type { RunParts } from './trends.ts'

export interface NewPair extends Omit<NewRun, 'source' | 'state'> {
  readonly kind: RunKind
  /** Where the readings come from, in words. */
  readonly about: string
  readonly state: 'live' | 'importing'
}

/** What is going on with runs that this process works on. */
export interface Busy {
  engine(run: number): Engine | null
  clock(run: number): RunClock
  sourceFault(run: number): string | null
  /** Progress of an import, 0 to 1, or its fault; null where there is none. */
  importing(run: number): { readonly progress: number; readonly fault: string | null } | null
}

/** Makes a run and, beside it, the one that keeps its detector steps. */
export function createPair(store: MonitorStore, { kind, about, ...run }: NewPair): { run: RunId; stepsRun: RunId } {
  return store.together(() => {
    const id = store.runs.create({ ...run, source: `${kind}: ${about}` })
    const stepsRun = store.runs.create({ ...run, title: stepsTitle(id), skidText: '', source: stepsTitle(id) })
    return { run: id, stepsRun }
  })
}

export const kindOf = (source: string): RunKind => {
  const kind = source.slice(0, source.indexOf(':'))
  return kind === 'simulated' || kind === 'followed' || kind === 'uploaded' ? kind : 'imported'
}

/** The runs of a store, as the pages list them. `skidOf` reads a stored skid file. */
export function createCatalogue(store: MonitorStore, skidOf: (text: string, file: string) => Skid, busy: Busy) {
  const skids = new Map<RunId, Skid>()
  const endedRows = new Map<RunId, Pick<RunRow, 'alarms' | 'fouling'>>()

  const all = (): RunSummary[] => store.runs.list().filter((r) => !isSteps(r.source))
  function summary(run: number): RunSummary {
    const found = all().find((r) => r.id === run)
    if (found === undefined)
      throw new MonitorError('RUN_UNKNOWN', `there is no run ${run}`, { hint: 'list the runs and choose one of them' })
    return found
  }
  function stepsOf(run: number): RunId {
    const found = store.runs.list().find((r) => r.source === stepsTitle(run))
    if (found === undefined) throw new MonitorError('STORE_DATA', `the detector steps of run ${run} are gone`)
    return found.id
  }
  /** Errors: RUN_UNKNOWN. */
  function parts(run: number): RunParts {
    const { id } = summary(run)
    let skid = skids.get(id)
    if (skid === undefined) {
      const { skidText, skidFile } = store.runs.get(id)
      skid = skidOf(skidText, skidFile)
      skids.set(id, skid)
    }
    return { store, skid, run: id, stepsRun: stepsOf(id) }
  }

  function judged(r: RunSummary): Pick<RunRow, 'alarms' | 'fouling'> {
    const engine = busy.engine(r.id)
    const known = endedRows.get(r.id)
    if (engine === null && known !== undefined) return known
    const rows = engine?.alarms.standing() ?? alarmsAt(parts(r.id), Infinity).all()
    const count = (p: string) => rows.filter((a) => a.priority === p && (engine === null || a.active || a.needsAck)).length
    const fouled = rows.filter((a) => a.kind === 'fouling' && a.segment !== null && (engine === null || a.active))
    const last = engine?.lastStep() ?? null
    const ratioOf = (segment: string): number | null => {
      if (engine !== null) return last?.segments[engine.skid.segments.findIndex((s) => s.id === segment)]?.ratio ?? null
      return lastRatio(store, r.id, segment)
    }
    const worst = fouled
      .map((a) => ({ segment: a.segment!, ratio: ratioOf(a.segment!) }))
      .sort((a, b) => (b.ratio ?? 0) - (a.ratio ?? 0))[0]
    const out = {
      alarms: {
        high: count('high'), medium: count('medium'), low: count('low'), unacknowledged: rows.filter((a) => a.needsAck).length,
      },
      fouling: worst ?? null,
    } // biome-ignore format: a list
    if (r.state === 'ended') endedRows.set(r.id, out)
    return out
  }

  function row(r: RunSummary): RunRow {
    const span = store.sequence.span(r.id)
    const work = busy.importing(r.id)
    const isBroken = r.state === 'importing' && (work === null || work.fault !== null)
    const live = busy.engine(r.id) !== null
    return {
      run: r.id,
      skid: r.skidId,
      title: r.title,
      state: isBroken ? 'failed' : r.state === 'live' && !live ? 'ended' : r.state,
      kind: kindOf(r.source),
      source: r.source.slice(r.source.indexOf(':') + 2),
      fault: isBroken ? (work?.fault ?? 'the import was interrupted: import it again') : live ? busy.sourceFault(r.id) : null,
      fromMs: span?.fromMs ?? null,
      toMs: span?.toMs ?? null,
      rows: store.sequence.count(r.id).rows,
      clock: live ? busy.clock(r.id) : null,
      progress: work !== null && r.state === 'importing' ? work.progress : null,
      ...judged(r),
    }
  }

  return {
    /** Newest first. */
    rows: (): RunRow[] => all().map(row).reverse(),
    row: (run: number): RunRow => row(summary(run)),
    summary,
    parts,
  }
}
export type Catalogue = ReturnType<typeof createCatalogue>

/** Ratio at the last timeline point of a segment. */
function lastRatio(store: MonitorStore, run: RunId, segment: string): number | null {
  const last = store.events.list(run).findLast((e) => e.kind === 'timeline')
  const e = last?.body as unknown as Extract<PipelineEvent, { kind: 'timeline' }> | undefined
  return e?.points.find((p) => p.segment === segment)?.ratio ?? null
}
