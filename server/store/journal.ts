import type Database from 'better-sqlite3'
import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import { rowHash } from '../trail/chain.ts'
import type { Json, RunId } from './keys.ts'
import type { Ledger } from './ledger.ts'

/** One output of the pipeline. */
export interface StoredEvent {
  /** Number of the entry that gave rise to it. */
  readonly seq: number
  readonly tMs: number
  readonly kind: string
  readonly body: Json
}

/** One change of an alarm's state (ALM-10): what, when, by whom or what, why, at which value. */
export interface AlarmTransition {
  readonly alarm: number
  readonly tMs: number
  readonly from: string
  readonly to: string
  readonly input: string
  readonly person: string | null
  readonly reason: string | null
  readonly value: number | null
  /** Whatever else belongs to it: limit, unit, quality, configuration version ... */
  readonly more: Json
}

/** How much of an append was new, and how many of those already there differ from what came now (0 for a deterministic replay). */
export interface Appended {
  readonly added: number
  readonly differing: number
}

interface EventRow extends Omit<StoredEvent, 'body'> {
  readonly json: string
}
type TransitionRow = Omit<AlarmTransition, 'more'> & { readonly more: string }

/**
 * What the pipeline said, numbered by the pipeline itself within a run. A restart that replays what followed its last snapshot
 * says some of it again: what has its number already is left as first written and only compared.
 */
export function journalStore(db: Database.Database, ledger: Pick<Ledger, 'run'>) {
  const insert = db.prepare('INSERT INTO event (run, idx, seq, t_ms, kind, json) VALUES (?, ?, ?, ?, ?, ?)')
  const columns = 'seq, t_ms AS tMs, kind, json'
  const one = db.prepare<[RunId, number], EventRow>(`SELECT ${columns} FROM event WHERE run = ? AND idx = ?`)
  const page = db.prepare<[RunId, number, number], EventRow & { idx: number }>(
    `SELECT idx, ${columns} FROM event WHERE run = ? AND idx >= ? ORDER BY idx LIMIT ?`,
  )
  const count = db.prepare<[RunId], number>('SELECT coalesce(max(idx) + 1, 0) FROM event WHERE run = ?').pluck()

  const insertTransition = db.prepare(
    `INSERT INTO alarm_transition (run, idx, alarm, t_ms, from_state, to_state, input, person, reason, value, more)
     VALUES (@run, @idx, @alarm, @tMs, @from, @to, @input, @person, @reason, @value, @more)`,
  )
  const transition = 'alarm, t_ms AS tMs, from_state AS "from", to_state AS "to", input, person, reason, value, more'
  const oneTransition = db.prepare<[RunId, number], TransitionRow>(
    `SELECT ${transition} FROM alarm_transition WHERE run = ? AND idx = ?`,
  )
  const transitions = db.prepare<[RunId, number], TransitionRow>(
    `SELECT ${transition} FROM alarm_transition WHERE run = ? AND idx >= ? ORDER BY idx`,
  )
  const countTransitions = db
    .prepare<[RunId], number>('SELECT coalesce(max(idx) + 1, 0) FROM alarm_transition WHERE run = ?')
    .pluck()

  return {
    events: {
      /** Numbers `from` on of a run. One transaction. */
      append: db.transaction((run: RunId, from: number, events: readonly StoredEvent[]): Appended => {
        const added: unknown[][] = []
        let differing = 0
        const known = count.get(run) ?? 0
        events.forEach(({ seq, tMs, kind, body }, i) => {
          const json = JSON.stringify(body)
          if (from + i >= known) {
            insert.run(run, from + i, seq, tMs, kind, json)
            added.push([from + i, seq, tMs, kind, json])
            return
          }
          const old = one.get(run, from + i)
          if (old === undefined || old.seq !== seq || old.tMs !== tMs || old.kind !== kind || old.json !== json) differing++
        })
        if (added.length > 0)
          ledger.run(run, { kind: 'events', from: Math.max(from, known), count: added.length, row: rowHash(added) })
        return { added: added.length, differing }
      }).immediate,
      /** At most `most` events from number `from` on, each with its number. */
      list: (run: RunId, from = 0, most = 1e9): (StoredEvent & { idx: number })[] =>
        page.all(run, from, most).map(({ json, ...row }) => ({ ...row, body: JSON.parse(json) as Json })),
      /** The number the next new event gets. */
      count: (run: RunId): number => count.get(run) ?? 0,
    },
    transitions: {
      /** Numbers `from` on of a run. One transaction. */
      append: db.transaction((run: RunId, from: number, batch: readonly AlarmTransition[]): Appended => {
        let added = 0
        let differing = 0
        const known = countTransitions.get(run) ?? 0
        batch.forEach((t, i) => {
          const row = {
            alarm: t.alarm,
            tMs: t.tMs,
            from: t.from,
            to: t.to,
            input: t.input,
            person: t.person,
            reason: t.reason,
            value: t.value,
            more: JSON.stringify(t.more),
          }
          const idx = from + i
          if (idx >= known) {
            insertTransition.run({ run, idx, ...row })
            ledger.run(run, {
              kind: 'transition', idx, transition: t.more as unknown as AlarmRecord, row: rowHash([idx, ...Object.values(row)]),
            }) // biome-ignore format: a list
            added++
          } else if (JSON.stringify(oneTransition.get(run, idx)) !== JSON.stringify(row)) differing++
        })
        return { added, differing }
      }).immediate,
      list: (run: RunId, from = 0): AlarmTransition[] =>
        transitions.all(run, from).map((row) => ({ ...row, more: JSON.parse(row.more) as Json })),
      count: (run: RunId): number => countTransitions.get(run) ?? 0,
    },
  }
}
