import type { Signal } from '../alarms/occurrence.ts'
import type { Layout } from '../derive/layout.ts'
import { why } from '../quality/judge.ts'
import { reasons } from '../quality/tag-rules.ts'
import type { Scan } from '../scan/grid.ts'

export interface InstrumentState {
  /** By tag: since when its readings fail, are missing, stand still, ms; −1 while not. */
  failingMs: number[]
  missingMs: number[]
  frozenMs: number[]
  lastReason: number[]
  /** Share of recent scans with a jump that counts, and whether that is too many. */
  spiky: number[]
  isSpiky: number[]
  /** Scans since a reading was last rejected for its value, and since its last jump that counted; up to `jumpy.apart`. */
  sinceAway: number[]
  sinceJump: number[]
  /** Scans in which the tag was judged, until they are enough to know its spikes. */
  judged: number[]
  lastRowMs: number
  /** Smoothed time between scans with rows, ms. */
  rowGapMs: number
  badTime: number
  lateRows: number
  lateSinceMs: number
  /** 1 once a tag's alarm has been over: from then on every scan has its word. */
  sensorOver: number[]
  missingOver: number[]
}

/** How long before a diagnostic alarm, s: failing or missing; standing still, by whether it is a flow. Default values, common practice. */
const after = { failing: 30, missing: 60, frozen: 420, frozenFlow: 90, noData: 10, lateRows: 20 }

/**
 * A reading that is rejected for its value and comes back has jumped. Jumps are counted when no other reading was rejected within `near` scans and when they lie `apart`, since
 * gas shakes a tap for a minute; over the last 300 scans or minute, at a share of `raise` (four of them) an instrument is called faulty. Common practice.
 */
const jumpy = { near: 10, apart: 20, raise: 0.0098, clear: 0.001 }
const none = { for: [], against: [], notExcluded: [] }

/**
 * Health of instruments and data: a tag that fails, is missing or stands still; a log that stopped; a clock that jumped. Only tags that
 * something is computed from can alarm. A tag that recovers clears after 30 s.
 */
export function createInstruments(layout: Layout, saved?: InstrumentState) {
  const { skid } = layout
  const n = skid.tags.length
  const scanMs = skid.scanSeconds * 1000
  const fill = () => new Array<number>(n).fill(-1)
  const s: InstrumentState = saved ?? {
    failingMs: fill(),
    missingMs: fill(),
    frozenMs: fill(),
    lastReason: fill(),
    spiky: new Array<number>(n).fill(0),
    isSpiky: new Array<number>(n).fill(0),
    sinceAway: new Array<number>(n).fill(jumpy.apart),
    sinceJump: new Array<number>(n).fill(jumpy.apart),
    judged: new Array<number>(n).fill(0),
    lastRowMs: -1,
    rowGapMs: 0,
    badTime: 0,
    lateRows: 0,
    lateSinceMs: -1,
    sensorOver: new Array<number>(n).fill(0),
    missingOver: new Array<number>(n).fill(0),
  }
  const used = usedTags(layout)
  const segmentOf = skid.tags.map((_, t) => layout.segments.find((g) => touchesTag(layout, g, t))?.spec.id ?? null)
  const flow = skid.tags.map((t) => t.quantity === 'massFlow' || t.quantity === 'volumeFlow')
  const finer = Math.min(1, skid.scanSeconds)
  const delay = {
    failing: after.failing * finer,
    missing: after.missing * finer,
    frozen: after.frozen * finer,
    frozenFlow: after.frozenFlow * finer,
    off: 30 * finer,
  }
  const spikyScans = Math.max(300, Math.round(60 / skid.scanSeconds))
  const judgedScans = Math.max(120, Math.round(60 / skid.scanSeconds))
  /** What a reading is rejected for that leaves its place and comes back. */
  const leaves = new Set([why.spike, why['impossible-rate'], why['out-of-range'], why['loop-failure'], why['open-circuit']])
  const begins = new Uint8Array(n)
  const failing = new Set([
    why['out-of-range'],
    why['loop-failure'],
    why['open-circuit'],
    why['source-bad'],
    why.unreadable,
    why['impossible-rate'],
  ])

  const mark = (list: number[], t: number, on: boolean, off: boolean, tMs: number) => {
    if (on && list[t]! < 0) list[t] = tMs
    else if (off) list[t] = -1
  }
  const over = (since: number, seconds: number, tMs: number) => since >= 0 && tMs - since >= seconds * 1000

  const base = (t: number, tMs: number) => ({
    tMs,
    segment: segmentOf[t]!,
    tag: skid.tags[t]!.tag,
    value: null,
    limit: null,
    unit: null,
    cause: 'sensor' as const,
    onset: null,
    evidence: none,
    onDelayS: 0,
    offDelayS: delay.off,
  })

  return {
    state: s,
    /** Judges one scan; true while the log is silent. */
    scan(scan: Scan, tMs: number, counts: { badTime: number; lateRows: number }, emit: (s: Signal) => void): boolean {
      let anything = false
      for (let t = 0; t < n; t++) anything ||= scan.used[t]! > 0 && scan.held[t] === 0
      if (anything) {
        if (s.lastRowMs >= 0) {
          // One outage must not make the watch deaf: the usual gap grows by a quarter at most.
          const gap = tMs - s.lastRowMs
          const usual = s.rowGapMs
          s.rowGapMs = usual === 0 ? gap : usual + Math.min(usual / 4, (gap - usual) / 16)
        }
        s.lastRowMs = tMs
      }
      const limitMs = Math.max(after.noData * 1000, 5 * s.rowGapMs, 10 * scanMs)
      const silent = s.lastRowMs >= 0 && tMs - s.lastRowMs > limitMs
      emit({
        key: 'no-data',
        tMs,
        over: silent,
        kind: 'no-data',
        segment: null,
        tag: null,
        priority: 'medium',
        value: s.lastRowMs < 0 ? null : (tMs - s.lastRowMs) / 1000,
        limit: limitMs / 1000,
        unit: 's',
        message: 'No readings from the logger: the monitor is blind, use the local panel',
        cause: null,
        onset: null,
        detector: 'age of data',
        evidence: none,
        onDelayS: 0,
        offDelayS: 0,
      })
      // Several readings that jump at about the same time are gas or a pump, not instruments.
      let jumping = 0
      for (let t = 0; t < n; t++) {
        const away = leaves.has(scan.flaw[t]!)
        begins[t] = away && s.sinceAway[t]! > 1 ? 1 : 0
        s.sinceAway[t] = away ? 0 : Math.min(s.sinceAway[t]! + 1, jumpy.apart)
        s.sinceJump[t] = Math.min(s.sinceJump[t]! + 1, jumpy.apart)
        if (s.sinceAway[t]! < jumpy.near) jumping++
      }
      for (let t = 0; t < n; t++) if (used[t]!) tag(t, scan, tMs, silent, jumping === 1, emit)
      monitorClock(tMs, counts, emit)
      return silent
    },
  }

  function tag(t: number, scan: Scan, tMs: number, silent: boolean, alone: boolean, emit: (s: Signal) => void): void {
    const flaw = scan.flaw[t]!
    const fresh = scan.used[t]! > 0 && scan.held[t] === 0
    const isFailing = failing.has(flaw)
    if (isFailing || flaw === why.frozen) s.lastReason[t] = flaw
    mark(s.failingMs, t, isFailing && !fresh, fresh && !isFailing, tMs)
    mark(s.frozenMs, t, flaw === why.frozen, fresh && flaw !== why.frozen, tMs)
    mark(s.missingMs, t, !silent && flaw === why.missing && !fresh, fresh || silent, tMs)
    const fails = over(s.failingMs[t]!, delay.failing, tMs)
    const frozen = over(s.frozenMs[t]!, flow[t]! ? delay.frozenFlow : delay.frozen, tMs)
    if (fresh || flaw !== 0) {
      // Until a reading's usual wiggle is known, much looks like a spike.
      s.judged[t] = Math.min(s.judged[t]! + 1, judgedScans)
      const jumped = begins[t] === 1 && alone && s.sinceJump[t] === jumpy.apart && s.judged[t] === judgedScans
      s.spiky[t] = s.spiky[t]! + ((jumped ? 1 : 0) - s.spiky[t]!) / spikyScans
      if (jumped) s.sinceJump[t] = 0
      s.isSpiky[t] = s.spiky[t]! > (s.isSpiky[t] === 1 ? jumpy.clear : jumpy.raise) ? 1 : 0
    }
    const spiky = s.isSpiky[t] === 1
    if (spiky) s.lastReason[t] = why.spike
    const gone = over(s.missingMs[t]!, delay.missing, tMs)
    const spec = skid.tags[t]!
    // A healthy tag costs no signal: nothing is said of what was never over.
    if (fails || frozen || spiky || s.sensorOver[t] === 1) {
      const clear = s.failingMs[t]! < 0 && s.frozenMs[t]! < 0 && !spiky
      emit({
        ...base(t, tMs),
        key: `sensor:${spec.tag}:reading`,
        over: fails || frozen || spiky,
        under: clear,
        kind: 'sensor',
        priority: 'medium',
        detector: frozen && !fails ? 'frozen' : 'quality',
        message: () =>
          `${spec.tag}: ${frozen && !fails ? 'reading stands still while liquid flows' : spiky && !fails ? 'reading jumps away and back again and again' : (reasons[s.lastReason[t]!] ?? 'reading fails').replaceAll('-', ' ')}; nothing is computed from it`,
      })
      s.sensorOver[t] = 1
    }
    if (gone || s.missingOver[t] === 1) {
      emit({
        ...base(t, tMs),
        key: `no-data:${spec.tag}`,
        over: gone,
        under: s.missingMs[t]! < 0,
        kind: 'no-data',
        priority: 'low',
        detector: 'age of data',
        message: () => `${spec.tag}: no readings while the rest of the log goes on`,
      })
      s.missingOver[t] = 1
    }
  }

  function monitorClock(tMs: number, counts: { badTime: number; lateRows: number }, emit: (s: Signal) => void): void {
    const jumped = counts.badTime > s.badTime
    const late = counts.lateRows - s.lateRows
    s.badTime = counts.badTime
    s.lateRows = counts.lateRows
    if (late > 0 && s.lateSinceMs < 0) s.lateSinceMs = tMs
    if (late === 0) s.lateSinceMs = -1
    const lagging = s.lateSinceMs >= 0 && (tMs - s.lateSinceMs) / scanMs >= after.lateRows
    if (!jumped && !lagging && counts.badTime === 0 && counts.lateRows === 0) return
    emit({
      key: 'monitor:clock',
      tMs,
      over: jumped || lagging,
      kind: 'monitor',
      segment: null,
      tag: null,
      priority: 'medium',
      value: null,
      limit: null,
      unit: null,
      message: jumped
        ? 'A row carried a time far from its neighbours: check the logger’s clock'
        : 'Rows keep arriving after their scan has closed: check clocks and link',
      cause: null,
      onset: null,
      detector: 'clock',
      evidence: none,
      onDelayS: 0,
      offDelayS: 30,
    })
  }
}
export type Instruments = ReturnType<typeof createInstruments>

function touchesTag(layout: Layout, g: Layout['segments'][number], t: number): boolean {
  return (
    g.dpTag === t ||
    g.inTag === t ||
    (g.tapOut !== null && layout.taps[g.tapOut]!.tag === t) ||
    g.temperatures.includes(t) ||
    g.streams.some((i) => layout.streams[i]!.tag === t) ||
    g.coolant === t
  )
}

/** Tags that something is computed from. */
const usedTags = (layout: Layout): boolean[] =>
  layout.skid.tags.map((_, t) => layout.segments.some((g) => touchesTag(layout, g, t)))
