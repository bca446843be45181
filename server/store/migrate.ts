import type Database from 'better-sqlite3'
import { MonitorError } from '../core/errors.ts'
import { adopt } from './adopt.ts'
import { sql as people } from './steps/people.ts'
import { sql as trail } from './steps/trail.ts'

/**
 * Appended to, never changed: `user_version` counts the steps a store has seen.
 *
 * Keys `id` of stage, segment and act are run · 2^36 + number in the run's sequence: one run's records lie together, in order.
 */
export const steps: readonly string[] = [
  `
  CREATE TABLE run (
    id INTEGER PRIMARY KEY AUTOINCREMENT, skid_id TEXT NOT NULL, title TEXT NOT NULL, skid_file TEXT NOT NULL, skid_text TEXT NOT NULL,
    source TEXT NOT NULL, started_ms REAL NOT NULL, tool_version TEXT NOT NULL, state TEXT NOT NULL) STRICT;
  CREATE TABLE head (
    run INTEGER PRIMARY KEY REFERENCES run(id), next_seq INTEGER NOT NULL, rows INTEGER NOT NULL, acts INTEGER NOT NULL, width INTEGER, first_ms REAL, last_ms REAL,
    staged_rows INTEGER NOT NULL, staged_ticks INTEGER NOT NULL, source_state TEXT) STRICT;
  CREATE TABLE word (run INTEGER NOT NULL REFERENCES run(id), idx INTEGER NOT NULL, word TEXT NOT NULL, PRIMARY KEY (run, idx)) STRICT, WITHOUT ROWID;
  CREATE TABLE stage (
    id INTEGER PRIMARY KEY, count INTEGER NOT NULL, rows INTEGER NOT NULL, t_min REAL NOT NULL, t_max REAL NOT NULL, sum INTEGER NOT NULL,
    body BLOB NOT NULL) STRICT;
  CREATE TABLE segment (id INTEGER PRIMARY KEY, body BLOB NOT NULL) STRICT;
  CREATE TABLE strip (
    id INTEGER PRIMARY KEY, segment INTEGER NOT NULL REFERENCES segment(id), strip INTEGER NOT NULL, body BLOB NOT NULL,
    UNIQUE (segment, strip)) STRICT;
  CREATE TABLE tier (
    id INTEGER PRIMARY KEY, run INTEGER NOT NULL REFERENCES run(id), level INTEGER NOT NULL, seq INTEGER NOT NULL, end_seq INTEGER NOT NULL,
    t_min REAL NOT NULL, t_max REAL NOT NULL, cell_ms INTEGER NOT NULL, sum INTEGER NOT NULL, body BLOB NOT NULL,
    UNIQUE (run, level, seq)) STRICT;
  CREATE TABLE act (id INTEGER PRIMARY KEY, sum INTEGER NOT NULL, json TEXT NOT NULL) STRICT;
  CREATE TABLE snapshot (run INTEGER NOT NULL REFERENCES run(id), seq INTEGER NOT NULL, json TEXT NOT NULL, UNIQUE (run, seq)) STRICT;
  CREATE TABLE event (
    run INTEGER NOT NULL REFERENCES run(id), idx INTEGER NOT NULL, seq INTEGER NOT NULL, t_ms REAL NOT NULL, kind TEXT NOT NULL,
    json TEXT NOT NULL, PRIMARY KEY (run, idx)) STRICT;
  CREATE TABLE alarm_transition (
    run INTEGER NOT NULL REFERENCES run(id), idx INTEGER NOT NULL, alarm INTEGER NOT NULL, t_ms REAL NOT NULL, from_state TEXT NOT NULL,
    to_state TEXT NOT NULL, input TEXT NOT NULL, person TEXT, reason TEXT, value REAL, more TEXT NOT NULL, PRIMARY KEY (run, idx)) STRICT;
  CREATE TABLE settings (
    id INTEGER PRIMARY KEY AUTOINCREMENT, scope TEXT NOT NULL, t_ms REAL NOT NULL, person TEXT NOT NULL, reason TEXT NOT NULL,
    json TEXT NOT NULL) STRICT;
  CREATE INDEX settings_scope ON settings (scope, t_ms);
  CREATE TABLE audit (
    id INTEGER PRIMARY KEY AUTOINCREMENT, t_ms REAL NOT NULL, person TEXT NOT NULL, act TEXT NOT NULL, reason TEXT NOT NULL, json TEXT NOT NULL) STRICT;
  CREATE TRIGGER audit_stays BEFORE UPDATE ON audit BEGIN SELECT RAISE(ABORT, 'the audit trail is append-only'); END;
  CREATE TRIGGER audit_kept BEFORE DELETE ON audit BEGIN SELECT RAISE(ABORT, 'the audit trail is append-only'); END;
  CREATE TRIGGER settings_stay BEFORE UPDATE ON settings BEGIN SELECT RAISE(ABORT, 'settings are kept by version'); END;
  CREATE TRIGGER settings_kept BEFORE DELETE ON settings BEGIN SELECT RAISE(ABORT, 'settings are kept by version'); END;
  `,
  // Up to which number a run is packed: a lost last segment must not look like a gap.
  `
  ALTER TABLE head ADD COLUMN packed INTEGER NOT NULL DEFAULT 0;
  UPDATE head SET packed = coalesce((SELECT max(end_seq) FROM tier WHERE tier.run = head.run AND level = 0), 0);
  `,
  trail,
  people,
]

/** Steps a store has seen. Errors: STORE_SCHEMA_NEWER when a newer build wrote it. */
export function seen(db: Database.Database): number {
  const done = db.pragma('user_version', { simple: true }) as number
  if (done > steps.length)
    throw new MonitorError('STORE_SCHEMA_NEWER', `the store has schema ${done}, this build knows ${steps.length}`, {
      hint: 'use the newer version of the tool that wrote it, or another --data folder',
    })
  return done
}

/** Brings a store to this build's schema and begins its chains where it has none, all in one transaction. Errors: STORE_SCHEMA_NEWER. */
export function migrate(db: Database.Database, wallMs: () => number, toolVersion: string): void {
  const done = seen(db)
  if (done === steps.length) return
  db.transaction(() => {
    for (const step of steps.slice(done)) db.exec(step)
    adopt(db, wallMs, toolVersion)
    db.pragma(`user_version = ${steps.length}`)
  }).immediate()
}

/** For a reader, who may not migrate. Errors: STORE_SCHEMA_NEWER, STORE_OPEN when the store is older than this build. */
export function checkSchema(db: Database.Database): void {
  const done = seen(db)
  if (done < steps.length)
    throw new MonitorError('STORE_OPEN', `the store has schema ${done}, this build reads ${steps.length}`, {
      hint: 'open it once for writing (start the server on it), then read it',
    })
}
