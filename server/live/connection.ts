import type { WebSocket } from 'ws'
import type { ActRow } from '../wire/act.ts'
import type { AlarmRow } from '../wire/alarm.ts'
import type { LiveState, LiveUpdate } from '../wire/live.ts'
import type { Problem } from '../wire/service.ts'
import type { Delta, Snapshot, Topic } from '../wire/socket.ts'
import type { ReadingFrame, StepPoint } from '../wire/trend.ts'
import { readClientMessage } from './client-message.ts'
import type { HubSource } from './hub.ts'

/** What is new of one run. */
export interface Fresh {
  readonly state: LiveState
  readonly steps: readonly StepPoint[]
  readonly readings: ReadingFrame | null
  readonly alarms: readonly AlarmRow[]
  readonly acts: readonly ActRow[]
}

interface Subscription {
  readonly topics: ReadonlySet<Topic>
  seq: number
  /** Time of the run up to which the page has steps and readings. */
  sinceMs: number | null
  /** Deltas were dropped: a snapshot is owed. */
  isBehind: boolean
  sentAlarms: string
  sentAdvice: string
  sentFlush: string
}

/** Bytes not yet taken by the network: above the first deltas are dropped, below the second a snapshot may go. */
const full = 1 << 20
const free = 1 << 16
/** So many heartbeats full, and the page is given up. */
const patience = 60
const mostSubscriptions = 16

/** One page. */
export function createConnection(socket: WebSocket, source: HubSource) {
  const subscriptions = new Map<number, Subscription>()
  let waited = 0
  const isFull = (): boolean => socket.bufferedAmount > full
  const send = (text: string): void => {
    if (socket.readyState === socket.OPEN && !isFull()) socket.send(text)
  }
  const complain = (message: string, hint: string | null = null): void => {
    const problem: Problem = { code: 'SOCKET_MESSAGE', message, hint, place: null }
    send(JSON.stringify({ type: 'error', problem }))
  }

  function snapshot(run: number, s: Subscription): void {
    const state = source.state(run)
    if (state === null) {
      subscriptions.delete(run)
      complain(`run ${run} is not live`, 'fetch it over HTTP')
      return
    }
    const wants = s.sinceMs !== null && (s.topics.has('steps') || s.topics.has('readings'))
    const missed = wants ? source.missed(run, s.sinceMs!) : { steps: [], readings: [], moreFromMs: null }
    s.isBehind = false
    s.sentAlarms = JSON.stringify(state.alarms)
    s.sentAdvice = JSON.stringify(state.advice)
    s.sentFlush = JSON.stringify(state.flush)
    s.sinceMs = state.comb.endMs ?? s.sinceMs
    const message: Snapshot = {
      type: 'snapshot',
      run,
      seq: s.seq,
      state,
      steps: s.topics.has('steps') ? missed.steps : [],
      readings: s.topics.has('readings') ? missed.readings : [],
      moreFromMs: missed.moreFromMs,
    }
    socket.send(JSON.stringify(message))
  }

  /** The state without its large parts that the page has already. */
  function update(s: Subscription, { alarms, advice, flush, ...rest }: LiveState): LiveUpdate {
    const alarmText = JSON.stringify(alarms)
    const adviceText = JSON.stringify(advice)
    const flushText = JSON.stringify(flush)
    const out = {
      ...rest,
      ...(alarmText === s.sentAlarms ? {} : { alarms }),
      ...(adviceText === s.sentAdvice ? {} : { advice }),
      ...(flushText === s.sentFlush ? {} : { flush }),
    }
    s.sentAlarms = alarmText
    s.sentAdvice = adviceText
    s.sentFlush = flushText
    return out
  }

  function heard(text: string): void {
    const message = readClientMessage(text)
    if ('fault' in message) complain(message.fault)
    else if (message.type === 'unsubscribe') subscriptions.delete(message.run)
    else if (subscriptions.size >= mostSubscriptions && !subscriptions.has(message.run))
      complain(`at most ${mostSubscriptions} runs at once`)
    else {
      const { run, topics, sinceMs } = message
      const s: Subscription = {
        topics: new Set(topics),
        seq: 0,
        sinceMs,
        isBehind: false,
        sentAlarms: '',
        sentAdvice: '',
        sentFlush: '',
      }
      subscriptions.set(run, s)
      snapshot(run, s)
    }
  }
  socket.on('message', (data, isBinary) => (isBinary ? complain('text frames only') : heard(String(data))))
  socket.on('error', () => socket.terminate())

  return {
    send,
    /** Sends what is new to a page that subscribed; says whether it did. */
    news(run: number, fresh: Fresh): boolean {
      const s = subscriptions.get(run)
      if (s === undefined || s.isBehind) return false
      if (isFull()) {
        s.isBehind = true
        return false
      }
      const delta: Delta = {
        type: 'delta',
        run,
        seq: ++s.seq,
        ...(s.topics.has('state') ? { state: update(s, fresh.state) } : {}),
        ...(s.topics.has('steps') && fresh.steps.length > 0 ? { steps: fresh.steps } : {}),
        ...(s.topics.has('readings') && fresh.readings !== null ? { readings: fresh.readings } : {}),
        ...(s.topics.has('alarms') && fresh.alarms.length > 0 ? { alarms: fresh.alarms } : {}),
        ...(s.topics.has('acts') && fresh.acts.length > 0 ? { acts: fresh.acts } : {}),
      }
      s.sinceMs = fresh.state.comb.endMs ?? s.sinceMs
      socket.send(JSON.stringify(delta))
      return true
    },
    /** A snapshot to a page that was too slow and has caught up; one that never does is let go. */
    catchUp(): void {
      waited = isFull() ? waited + 1 : 0
      if (waited > patience) socket.terminate()
      if (socket.bufferedAmount > free || waited > patience) return
      for (const [run, s] of subscriptions) if (s.isBehind) snapshot(run, s)
    },
    close(code = 1001, why = 'the server is closing'): void {
      socket.close(code, why)
      setTimeout(() => socket.terminate(), 500).unref()
    },
  }
}
export type Connection = ReturnType<typeof createConnection>
