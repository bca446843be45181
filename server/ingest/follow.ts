import { basename } from 'node:path'
import { MonitorError } from '../core/errors.ts'
import type { RowBlock } from '../core/reading.ts'
import type { Skid } from '../core/skid.ts'
import type { Json } from '../store/keys.ts'
import { PushReader, type ReaderPoint } from './csv/reader.ts'
import { type FilePoint, type FollowedFile, findAgain, openFollowed } from './follow-file.ts'
import type { Polled, Source, SourceStatus } from './source.ts'

export interface FollowOptions {
  readonly skid: Skid
  readonly path: string
  /** For logs with elapsed seconds or bare times of day. */
  readonly startMs: number | null
  readonly wallMs: () => number
  readonly steadyMs: () => number
  /** As the store kept it; null for a run that begins. */
  readonly state: Json
  /** The run's words so far; the reader adds to the list. */
  readonly words: string[]
}

/** Pause between rows that a logger is granted until its own is known, s: many write out a buffer each 10 s. */
const firstGapS = 15

interface Read {
  readonly blocks: RowBlock[]
  /** Where the reader stands after them. */
  readonly at: ReaderPoint | null
  readonly mistake: MonitorError | null
}

interface State {
  readonly file: FilePoint | null
  readonly reader: ReaderPoint | null
  /** Wall clock less the time of the newest row, when it came. */
  readonly offsetMs: number | null
}

/**
 * A log that a data logger is still appending to, followed by looking at it again and again. A line counts once its end is written.
 * Rotation (another file at the path): the old one is read to its end first, also when it happened while the process was down; an
 * unfinished last line of it is left out and told. Truncation, or other bytes where we stood: read anew from the start.
 *
 * The run's clock is the logger's: newest row plus the time since it came, so a logger whose clock is an hour off is not called late.
 */
export function followSource(o: FollowOptions): Source {
  const name = basename(o.path)
  const saved = o.state as State | null
  const options = { skid: o.skid, words: o.words, startMs: o.startMs }
  let file: FollowedFile | null = null
  let reader = new PushReader(name, options)
  let base = 0
  let fed = 0
  let point: FilePoint | null = saved?.file ?? null
  /** Where a restart would go on. */
  let last: State | null = saved
  let resumed = saved === null
  let status: SourceStatus = { state: 'waiting', message: null }
  let offsetMs = saved?.offsetMs ?? null
  let newestMs: number | null = null
  let cameAt = o.steadyMs()
  let usualS = Math.max(o.skid.scanSeconds, firstGapS)
  let wordsKnown = o.words.length
  const wallAtStart = o.wallMs()
  const steadyAtStart = o.steadyMs()
  /** The wall clock as it would be had nobody set it since the start. */
  const wall = (): number => wallAtStart + (o.steadyMs() - steadyAtStart)
  const nowMs = (): number => Math.round(offsetMs === null ? wall() : wall() - offsetMs)

  async function begin(next: FollowedFile | null, at: ReaderPoint | null): Promise<void> {
    await file?.close()
    file = next
    reader = new PushReader(name, options, at)
    base = at?.offset ?? 0
    fed = 0
    point = null
  }

  async function resume(saved: State): Promise<void> {
    const found = saved.file === null ? null : await findAgain(o.path, saved.file)
    if (found !== null) {
      await begin(found, saved.reader)
      point = saved.file
    } else await begin(await openFollowed(o.path), null)
  }

  /** The rows of a piece; where the reader refuses, those before the line it stumbles over, and the mistake. */
  function rowsOf(bytes: Uint8Array): Read {
    const before = reader.point()
    try {
      const fed = reader.feed(bytes)
      const blocks = fed.length === 0 && before === null ? reader.settle() : fed
      return { blocks, at: reader.point(), mistake: null }
    } catch (mistake) {
      if (!(mistake instanceof MonitorError)) throw mistake
      return before === null ? { blocks: [], at: null, mistake } : { ...lineByLine(before, bytes), mistake }
    }
  }

  function lineByLine(from: ReaderPoint, bytes: Uint8Array): Pick<Read, 'blocks' | 'at'> {
    const again = new PushReader(name, options, from)
    const out: RowBlock[] = []
    // What the broken reader held of an unfinished line is read from the file again at the next poll.
    const text = bytes.subarray(Math.max(0, from.offset - (base + fed - bytes.length)))
    try {
      for (let at = 0; at < text.length; ) {
        const end = text.indexOf(10, at) + 1 || text.length
        for (const b of again.feed(text.subarray(at, end))) out.push(structuredClone(b))
        at = end
      }
    } catch (error) {
      if (!(error instanceof MonitorError)) throw error
    }
    return { blocks: out, at: again.point() }
  }

  const waiting = (message: string): Polled => {
    status = { state: 'waiting', message }
    return quiet()
  }

  /** Nothing came: a tick, once the pause is longer than this logger's usual ones. */
  function quiet(): Polled {
    const pauseS = (o.steadyMs() - cameAt) / 1000
    const isLong = offsetMs !== null && pauseS > o.skid.lateSeconds + Math.max(2 * o.skid.scanSeconds, 2 * usualS)
    return { entries: isLong ? [{ kind: 'tick', tMs: nowMs() }] : [], more: false, ended: false }
  }

  function arrived(blocks: readonly RowBlock[], more: boolean): void {
    for (const b of blocks) for (let i = 0; i < b.rows; i++) if (newestMs === null || b.tMs[i]! > newestMs) newestMs = b.tMs[i]!
    const now = o.steadyMs()
    if (!more) usualS = Math.min(60, Math.max((now - cameAt) / 1000, 0.9 * usualS, o.skid.scanSeconds))
    cameAt = now
    if (newestMs !== null) offsetMs = wall() - newestMs
  }

  async function poll(): Promise<Polled> {
    if (!resumed && last !== null) await resume(last)
    resumed = true
    if (file === null) await begin(await openFollowed(o.path), null)
    if (file === null) return waiting(`waiting for ${o.path}: there is no such file yet`)
    const open: FollowedFile = file
    const look = await open.look(o.path, point ?? { ino: open.ino, offset: 0, tail: '' })
    if (look === 'truncated') {
      await begin(await openFollowed(o.path), null)
      status = { state: 'running', message: `${name} was begun anew; read from its start` }
      if (file === null) return quiet()
    }
    if (status.state === 'failed') return look === 'rotated' ? await rotate() : quiet()
    const { bytes, more } = await file.read(base + fed)
    if (bytes.length === 0) {
      if (look === 'rotated') return await rotate()
      if (look === 'gone') return waiting(`${name} is gone; waiting for it to come back`)
      return quiet()
    }
    fed += bytes.length
    const { blocks, at, mistake } = rowsOf(bytes)
    if (mistake !== null) status = { state: 'failed', message: mistake.line() }
    else if (status.state !== 'running') status = { state: 'running', message: null }
    const rows = blocks.reduce((n, b) => n + b.rows, 0)
    // Up to here the file is known by its bytes; the reader's own point lies before an unfinished line.
    point = await file.point(at?.offset ?? base)
    if (rows === 0 && mistake === null && !more) return quiet()
    if (rows > 0) arrived(blocks, more)
    const fresh = o.words.slice(wordsKnown)
    const from = wordsKnown
    wordsKnown = o.words.length
    last = { file: point, reader: at, offsetMs }
    return {
      entries: blocks.filter((b) => b.rows > 0).map((block) => ({ kind: 'rows', block })),
      ...(fresh.length > 0 ? { words: { from, words: fresh } } : {}),
      state: last as unknown as Json,
      more,
      ended: false,
    }
  }

  async function rotate(): Promise<Polled> {
    const left = base + fed - (reader.point()?.offset ?? base + fed)
    const next = await openFollowed(o.path)
    if (next === null) return quiet()
    await begin(next, null)
    const lost = left > 0 ? `; ${left} bytes of a line that was never finished were left out` : ''
    status = { state: 'running', message: `${name} was rotated; reading the new file${lost}` }
    last = { file: await next.point(0), reader: null, offsetMs }
    return { ...quiet(), state: last as unknown as Json, more: true }
  }

  return {
    kind: 'followed',
    about: o.path,
    async poll() {
      try {
        return await poll()
      } catch (error) {
        const e = error as NodeJS.ErrnoException
        if (typeof e.code !== 'string' || e instanceof MonitorError) throw error
        await file?.close().catch(() => undefined)
        file = null
        resumed = last === null
        return waiting(`cannot read ${o.path}: ${e.message}`)
      }
    },
    status: () => status,
    clock: () => ({ kind: 'wall', nowMs: nowMs(), speed: 1 }),
    usualGapS: () => usualS,
    async close() {
      await file?.close()
      file = null
    },
  }
}
