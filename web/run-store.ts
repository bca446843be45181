import type {
  Delta,
  LiveState,
  Marks,
  ReadingFrame,
  RunDetail,
  ServerMessage,
  Snapshot,
  StepPoint,
  Trends,
} from '../server/wire/index.ts'
import { getJson } from './api.ts'
import type { Feed } from './feed.ts'
import { emptyRun, grow, putTrends, type RunData, rhythmMs } from './model/run-data.ts'

const buckets = 1000
/** After a failed try, ms. */
const againMs = 2000

export async function loadRun(run: number, signal?: AbortSignal): Promise<RunData> {
  const [detail, marks] = await Promise.all([
    getJson<RunDetail>(`/api/runs/${run}`, signal),
    getJson<Marks>(`/api/runs/${run}/marks`, signal),
  ])
  return emptyRun(detail, marks)
}

/** Tags that trends draw: all with a unit. */
const trendTags = (data: RunData): string[] => data.detail.skidFacts.tags.filter((t) => t.unit !== null).map((t) => t.tag)

/** Fetches a window of every trend and puts it in place of what was there; live points after its end stay unless told otherwise. */
export async function fetchWindow(
  data: RunData,
  fromMs: number,
  toMs: number,
  signal?: AbortSignal,
  keepLater = true,
): Promise<void> {
  const span = Math.max(1000, Math.ceil(toMs) - Math.floor(fromMs))
  const n = Math.max(1, Math.min(buckets, Math.floor(span / (1000 * data.detail.skidFacts.scanSeconds))))
  const query = new URLSearchParams({
    fromMs: String(Math.floor(fromMs)),
    toMs: String(Math.ceil(toMs)),
    buckets: String(n),
    tags: trendTags(data).join(','),
  })
  const t = await getJson<Trends>(`/api/runs/${data.detail.run}/trends?${query}`, signal)
  putTrends(data, t, keepLater)
  data.window.fromMs = fromMs
  data.window.toMs = toMs
}

/** A run that is being watched: snapshot, deltas, and whatever was missed. */
export function follow(data: RunData, feed: Feed, changed: (what: { state: boolean; points: boolean; marks: boolean }) => void) {
  const run = data.detail.run
  let state: LiveState | null = null
  let seq = -1
  let sinceMs: number | null = null
  let marks = data.marks
  let marksKey = ''
  let refilling = false
  let isOver = false

  const subscribe = (): void =>
    feed.send({ type: 'subscribe', run, topics: ['state', 'steps', 'readings', 'alarms', 'acts'], sinceMs })

  function points(steps: readonly StepPoint[], frames: readonly ReadingFrame[]): void {
    const lastMs = state?.data.lastRowMs ?? Infinity
    grow(data, steps, frames, state?.clock.speed ?? 1, lastMs)
    const newest = Math.min(lastMs, Math.max(steps.at(-1)?.tMs ?? 0, frames.at(-1)?.toMs ?? 0))
    if (newest > 0) sinceMs = Math.max(sinceMs ?? 0, newest)
  }

  /** Marks are asked for again when something they hold has changed. */
  function checkMarks(): void {
    if (state === null) return
    const key = JSON.stringify(state.segments.map((s) => [s.baseline?.fromMs, s.baseline?.provisional, s.onset?.atMs, s.limits]))
    if (key === marksKey) return
    marksKey = key
    getJson<Marks>(`/api/runs/${run}/marks`).then(
      (m) => {
        marks = m
        changed({ state: false, points: false, marks: true })
      },
      () => {
        marksKey = ''
      },
    )
  }

  /** Puts the stored trends in place of what was missed or came too coarse; asks again until they come. */
  function refill(): void {
    if (refilling || isOver || state === null || data.window.toMs === 0) return
    refilling = true
    fetchWindow(data, data.window.fromMs, (state.data.lastRowMs ?? state.clock.nowMs) + 1).then(
      () => {
        refilling = false
        changed({ state: false, points: true, marks: false })
      },
      () =>
        setTimeout(() => {
          refilling = false
          refill()
        }, againMs),
    )
  }

  function snapshot(m: Snapshot): void {
    const again = state !== null
    seq = m.seq
    state = m.state
    points(m.steps, m.readings)
    checkMarks()
    changed({ state: true, points: true, marks: false })
    // After a break, and where the snapshot could not hold all of it, the stored trends fill in what was missed.
    if (again || m.moreFromMs !== null) refill()
  }

  function delta(m: Delta): void {
    if (m.seq !== seq + 1) {
      subscribe()
      return
    }
    seq = m.seq
    if (m.state !== undefined && state !== null) state = { ...state, ...m.state }
    if (m.alarms !== undefined && m.state?.alarms === undefined && state !== null) {
      const fresh = new Map(m.alarms.map((a) => [a.id, a]))
      const kept = state.alarms.filter((a) => !fresh.has(a.id))
      state = { ...state, alarms: [...kept, ...[...fresh.values()].filter((a) => a.state !== 'NORM')].sort((a, b) => a.id - b.id) }
    }
    const frames = m.readings === undefined ? [] : [m.readings]
    points(m.steps ?? [], frames)
    // A frame that was long in coming is one point where there should be many.
    if (frames.some((f) => f.toMs - f.fromMs > rhythmMs(state?.clock.speed ?? 1))) refill()
    checkMarks()
    changed({
      state: m.state !== undefined || m.alarms !== undefined,
      points: m.steps !== undefined || frames.length > 0,
      marks: false,
    })
  }

  return {
    state: (): LiveState | null => state,
    marks: (): Marks => marks,
    subscribe,
    take(m: ServerMessage): void {
      if (m.type === 'snapshot' && m.run === run) snapshot(m)
      else if (m.type === 'delta' && m.run === run) delta(m)
    },
    stop(): void {
      isOver = true
      feed.send({ type: 'unsubscribe', run })
    },
  }
}
export type Followed = ReturnType<typeof follow>
