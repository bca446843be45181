import type { AlarmRecord } from './core/alarms/alarm-state.ts'
import { MonitorError } from './core/errors.ts'
import type { Report } from './core/report.ts'
import type { Entry } from './core/sequence.ts'
import { lateActs } from './monitor/after-end.ts'
import { createEngine, type Engine } from './monitor/engine.ts'
import { alarmsAt } from './monitor/stored-state.ts'
import type { RunParts } from './monitor/trends.ts'
import { type AlarmFilter, alarmsCsv, alarmsJson, filteredHistory } from './record/alarm-history.ts'
import { eventsCsv } from './record/events-csv.ts'
import { type ExportFacts, exportFacts } from './record/facts.ts'
import { howToVerify, recordText } from './record/record-json.ts'
import { samplesCsv } from './record/samples-csv.ts'
import type { RunRow } from './wire/run.ts'

export const exportKinds = ['alarms', 'samples', 'events', 'record'] as const
export type ExportKind = (typeof exportKinds)[number]

export interface ExportRequest {
  readonly parts: RunParts
  readonly row: RunRow
  /** The run's engine while it is live. */
  readonly live: Engine | null
  readonly what: ExportKind
  readonly format: 'csv' | 'json'
  readonly filter: AlarmFilter
  readonly toolVersion: string
  readonly nowMs: number
}

export interface Exported {
  readonly facts: ExportFacts
  readonly name: string
  readonly contentType: string
  readonly pieces: Iterable<string>
}

export const noFilter: AlarmFilter = { fromMs: null, toMs: null, kind: null, segment: null, priority: null }

/** Which formats a kind of export comes in. */
export const formatsOf: Readonly<Record<ExportKind, readonly ('csv' | 'json')[]>> = {
  alarms: ['csv', 'json'],
  samples: ['csv'],
  events: ['csv'],
  record: ['json'],
}

/** A run as a file, in pieces, and what the file is. What a live run says after the export began is not in it. Errors: USAGE for a format it has not. */
export function exportRun(r: ExportRequest): Exported {
  if (!formatsOf[r.what].includes(r.format))
    throw new MonitorError('USAGE', `${r.what} cannot be exported as ${r.format}`, { hint: `as ${formatsOf[r.what].join(' or ')}` })
  const { store, run, skid } = r.parts
  const { skidText, skidFile, toolVersion: recordedWith } = store.runs.get(run)
  const name = `clearbore-${r.row.skid}-run${run}-${r.what}.${r.format}`
  const contentType = r.format === 'csv' ? 'text/csv; charset=utf-8' : 'application/json; charset=utf-8'
  const base = {
    what: r.what,
    row: r.row,
    skidText,
    timeZone: skid.timeZone,
    recordedWith,
    toolVersion: r.toolVersion,
    nowMs: r.nowMs,
  }
  // Counts, transitions and chain as of one moment, whoever writes beside us.
  const {
    end,
    history: all,
    links,
  } = store.trail.atOnce(() => ({
    end: store.sequence.count(run),
    history: store.transitions.list(run).map((t) => t.more as unknown as AlarmRecord),
    links: store.trail.ofRun(run),
  }))
  const trail = { store: store.trail.signing().store, count: links.length, head: links.at(-1)?.hash ?? '' }
  const entries = () => upTo(store.sequence.read(run), end.entries)

  if (r.what === 'events') {
    const acts = [...store.sequence.acts(run), ...lateActs(store, run)]
    const lines = [...eventsCsv(acts)]
    const facts = exportFacts({ ...base, trail, fromMs: null, toMs: null, rows: lines.length - 1 })
    return { facts, name, contentType, pieces: gathered(lines) }
  }
  if (r.what === 'samples') {
    const csv = samplesCsv(skid, store.runs.words(run), entries)
    const facts = exportFacts({ ...base, trail, fromMs: null, toMs: null, rows: end.rows, filter: { layout: csv.layout } })
    return { facts, name, contentType, pieces: gathered(csv.lines()) }
  }
  if (r.what === 'record') {
    const report: Report = r.live === null ? createEngine(r.parts).report() : r.live.report()
    const facts = exportFacts({ ...base, trail, fromMs: null, toMs: null, rows: end.rows })
    const head = {
      record: 1 as const,
      ...facts,
      verify: howToVerify,
      skidFile: { name: skidFile, text: skidText },
      words: store.runs.words(run),
    }
    const parts = { head, entries: entries(), transitions: all, report, chain: links.map((l) => l.text), sign: store.trail.sign }
    return { facts, name, contentType, pieces: gathered(recordText(parts)) }
  }
  const rows = r.live?.alarms.all() ?? alarmsAt(r.parts, Infinity).all()
  const history = filteredHistory(all, rows, r.filter)
  const { fromMs, toMs, kind, segment, priority } = r.filter
  const facts = exportFacts({ ...base, trail, fromMs, toMs, rows: history.length, filter: { kind, segment, priority } })
  const pieces = r.format === 'csv' ? gathered(alarmsCsv(facts, history, rows)) : [alarmsJson(facts, history, rows)]
  return { facts, name, contentType, pieces }
}

/** Entries before number `end`, a block that goes beyond it cut. */
function* upTo(entries: Iterable<{ seq: number; entry: Entry }>, end: number): Generator<{ seq: number; entry: Entry }> {
  for (const { seq, entry } of entries) {
    if (seq >= end) return
    if (entry.kind === 'rows' && seq + entry.block.rows > end)
      yield { seq, entry: { kind: 'rows', block: { ...entry.block, rows: end - seq } } }
    else yield { seq, entry }
  }
}

/** The same text in pieces of about 64 kB. */
function* gathered(lines: Iterable<string>): Generator<string> {
  let piece = ''
  for (const line of lines) {
    piece += line
    if (piece.length < 65_536) continue
    yield piece
    piece = ''
  }
  if (piece !== '') yield piece
}
