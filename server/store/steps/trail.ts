/**
 * The chains (0: the site's, else a run's), their heads, the signed heads of the site's chain, and guards: what a chain stands for is
 * neither changed nor dropped while its run is there. `INSERT OR REPLACE` drops without firing a trigger of deletion, so inserts are guarded too.
 * Step of the database for the trail; never changed once released.
 */
const appendOnly = (table: string, clash: string) => `
  CREATE TRIGGER ${table}_stays BEFORE UPDATE ON ${table} BEGIN SELECT RAISE(ABORT, '${table} is append-only'); END;
  CREATE TRIGGER ${table}_kept BEFORE DELETE ON ${table} BEGIN SELECT RAISE(ABORT, '${table} is append-only'); END;
  CREATE TRIGGER ${table}_added BEFORE INSERT ON ${table} WHEN ${clash} BEGIN SELECT RAISE(ABORT, '${table} is append-only'); END;`

/** Rows of a run: never changed, dropped only once the run was deleted, which is itself a record. */
const ofRun = (table: string, run: (row: string) => string, key: string) => `
  CREATE TRIGGER ${table}_stays BEFORE UPDATE ON ${table} BEGIN SELECT RAISE(ABORT, 'what a run recorded stays'); END;
  CREATE TRIGGER ${table}_kept BEFORE DELETE ON ${table} WHEN (SELECT state FROM run WHERE id = ${run('OLD')}) <> 'deleted'
    BEGIN SELECT RAISE(ABORT, 'what a run recorded stays'); END;
  CREATE TRIGGER ${table}_added BEFORE INSERT ON ${table} WHEN EXISTS (SELECT 1 FROM ${table} WHERE ${key})
    BEGIN SELECT RAISE(ABORT, 'what a run recorded stays'); END;`

const byKey = (row: string) => `${row}.id / 68719476736`
const byRun = (row: string) => `${row}.run`

export const sql = `
  CREATE TABLE store (id TEXT NOT NULL) STRICT;
  INSERT INTO store VALUES (lower(hex(randomblob(16))));
  CREATE TABLE link (chain INTEGER NOT NULL, n INTEGER NOT NULL, hash BLOB NOT NULL, kind TEXT NOT NULL, json TEXT NOT NULL, PRIMARY KEY (chain, n)) STRICT, WITHOUT ROWID;
  CREATE INDEX link_told ON link (chain, n) WHERE kind NOT IN ('heads', 'readings', 'events', 'words');
  CREATE TABLE chain (id INTEGER PRIMARY KEY, count INTEGER NOT NULL, head BLOB NOT NULL, sealed INTEGER NOT NULL) STRICT;
  CREATE TABLE seal (count INTEGER PRIMARY KEY, t_ms REAL NOT NULL, key TEXT NOT NULL, signature BLOB NOT NULL) STRICT;
  ALTER TABLE audit ADD COLUMN run INTEGER;
  ALTER TABLE audit ADD COLUMN old TEXT;
  ALTER TABLE audit ADD COLUMN new TEXT;
  ALTER TABLE audit ADD COLUMN recorded_ms REAL;
  CREATE TRIGGER store_stays BEFORE UPDATE ON store BEGIN SELECT RAISE(ABORT, 'a store keeps its id'); END;
  CREATE TRIGGER store_kept BEFORE DELETE ON store BEGIN SELECT RAISE(ABORT, 'a store keeps its id'); END;
  CREATE TRIGGER chain_kept BEFORE DELETE ON chain BEGIN SELECT RAISE(ABORT, 'chains are kept'); END;
  CREATE TRIGGER audit_added BEFORE INSERT ON audit WHEN EXISTS (SELECT 1 FROM audit WHERE id = NEW.id)
    BEGIN SELECT RAISE(ABORT, 'the audit trail is append-only'); END;
  CREATE TRIGGER settings_added BEFORE INSERT ON settings WHEN EXISTS (SELECT 1 FROM settings WHERE id = NEW.id)
    BEGIN SELECT RAISE(ABORT, 'settings are kept by version'); END;
  CREATE TRIGGER run_stays BEFORE UPDATE OF id, skid_id, title, skid_file, skid_text, source, started_ms, tool_version ON run
    BEGIN SELECT RAISE(ABORT, 'what a run recorded stays'); END;
  CREATE TRIGGER run_kept BEFORE DELETE ON run WHEN OLD.state <> 'deleted' BEGIN SELECT RAISE(ABORT, 'what a run recorded stays'); END;
  ${appendOnly('link', 'NEW.n <> coalesce((SELECT max(n) + 1 FROM link WHERE chain = NEW.chain), 0)')}
  ${appendOnly('seal', 'EXISTS (SELECT 1 FROM seal WHERE count >= NEW.count)')}
  ${ofRun('act', byKey, 'id = NEW.id')}
  ${ofRun('segment', byKey, 'id = NEW.id')}
  ${ofRun('strip', (row) => `${row}.segment / 68719476736`, 'segment = NEW.segment AND strip = NEW.strip')}
  ${ofRun('word', byRun, 'run = NEW.run AND idx = NEW.idx')}
  ${ofRun('event', byRun, 'run = NEW.run AND idx = NEW.idx')}
  ${ofRun('alarm_transition', byRun, 'run = NEW.run AND idx = NEW.idx')}
`
