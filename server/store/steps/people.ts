/**
 * People, their sessions and one-time links by SHA-256 alone, failed sign-ins. A person is disabled, never dropped or renamed: past acts keep
 * their name. Step of the database for people; never changed once released.
 */
export const sql = `
  CREATE TABLE person (
    id INTEGER PRIMARY KEY AUTOINCREMENT, name TEXT NOT NULL, key TEXT NOT NULL UNIQUE, role TEXT NOT NULL, password TEXT, disabled INTEGER NOT NULL,
    added_ms REAL NOT NULL, signed_in_ms REAL) STRICT;
  CREATE TABLE session (hash BLOB PRIMARY KEY, person INTEGER NOT NULL REFERENCES person(id), begun_ms REAL NOT NULL, seen_ms REAL NOT NULL) STRICT, WITHOUT ROWID;
  CREATE TABLE person_link (hash BLOB PRIMARY KEY, person INTEGER REFERENCES person(id), ends_ms REAL NOT NULL) STRICT, WITHOUT ROWID;
  CREATE TABLE failure (key TEXT PRIMARY KEY, count INTEGER NOT NULL, last_ms REAL NOT NULL) STRICT, WITHOUT ROWID;
  CREATE TRIGGER person_kept BEFORE DELETE ON person BEGIN SELECT RAISE(ABORT, 'people are disabled, not dropped'); END;
  CREATE TRIGGER person_stays BEFORE UPDATE OF id, name, key, added_ms ON person BEGIN SELECT RAISE(ABORT, 'a person keeps the name'); END;
  CREATE TRIGGER person_added BEFORE INSERT ON person WHEN EXISTS (SELECT 1 FROM person WHERE id = NEW.id OR key = NEW.key)
    BEGIN SELECT RAISE(ABORT, 'there is a person of that name'); END;
`
