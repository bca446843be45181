import { accessSync, constants, existsSync, mkdirSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { MonitorError } from '../core/errors.ts'
import { auditStore } from './audit.ts'
import { asStoreError, guarded } from './fault.ts'
import { journalStore } from './journal.ts'
import { checkSchema, migrate } from './migrate.ts'
import { readingStore } from './readings.ts'
import { reclaimer } from './reclaim.ts'
import { runStore } from './runs.ts'
import { segmentTable } from './segments.ts'
import { type Append, sequenceStore } from './sequence.ts'
import { settingsStore } from './settings.ts'
import { snapshotStore } from './snapshots.ts'

export interface StoreOptions {
  /** FULL (default): a commit is on the disk when it returns. NORMAL: it survives a crash of the process, not of the machine. */
  readonly synchronous?: 'FULL' | 'NORMAL'
  /** Looks only; may be opened beside the process that writes. */
  readonly readonly?: boolean
  /** A further connection of the process that holds the store already (a worker thread): takes no lock of its own. */
  readonly joined?: boolean
  /** Largest size of the database [pages of 4096 bytes]; past it writes fail as on a full disk. */
  readonly maxPages?: number
}

const fileName = 'clearbore.db'
const pageBytes = 4096
/** Free pages kept for reuse [16 MB]: staging frees and takes pages all the time. */
const sparePages = 4096

/** Held for the process's life; the system drops it when the process dies, however it dies. */
function lock(dir: string): Database.Database {
  const held = new Database(join(dir, 'lock.db'), { timeout: 0 })
  try {
    held.pragma('journal_mode = DELETE')
    held.exec('BEGIN EXCLUSIVE')
    return held
  } catch (error) {
    held.close()
    throw error
  }
}

function folder(dir: string, readonly: boolean): void {
  if (readonly) {
    if (existsSync(join(dir, fileName))) return
    throw new MonitorError('STORE_OPEN', `there is no store in ${dir}`, {
      hint: 'name the folder that the server or an import wrote with --data',
    })
  }
  mkdirSync(dir, { recursive: true })
  accessSync(dir, constants.W_OK)
}

/**
 * Opens the store in a folder, making both where they are missing, and brings an older one to this build's schema.
 * Errors: STORE_OPEN (folder cannot be made or written), STORE_LOCKED (another process has it), STORE_SCHEMA_NEWER, STORE_CORRUPT, DISK_FULL.
 */
export function openStore(dir: string, options: StoreOptions = {}): Store {
  const place = `the store in ${dir}`
  return guarded(place, () => {
    const readonly = options.readonly === true
    folder(dir, readonly)
    const held = readonly || options.joined === true ? null : lock(dir)
    let db: Database.Database | null = null
    try {
      db = new Database(join(dir, fileName), { readonly, timeout: 5000 })
      if (!readonly) {
        db.pragma(`page_size = ${pageBytes}`)
        db.pragma('auto_vacuum = INCREMENTAL')
        db.pragma('journal_mode = WAL')
        db.pragma(`synchronous = ${options.synchronous ?? 'FULL'}`)
        db.pragma('journal_size_limit = 67108864')
        if (options.maxPages !== undefined) db.pragma(`max_page_count = ${options.maxPages}`)
      }
      db.pragma('foreign_keys = ON')
      db.pragma('cache_size = -16384')
      if (readonly) checkSchema(db)
      else migrate(db)
      return assemble(db, held, place)
    } catch (error) {
      db?.close()
      held?.close()
      throw error
    }
  })()
}

function assemble(db: Database.Database, held: Database.Database | null, place: string) {
  const segments = segmentTable(db)
  const runs = runStore(db)
  const sequence = sequenceStore(db, segments)
  const journal = journalStore(db)
  const readings = readingStore(db, segments)
  const reclaim = reclaimer(db)
  const packNext = db.transaction(() => sequence.packNext())
  const purgeNext = db.transaction(() => reclaim.purgeNext())
  const append = db.transaction((batch: readonly Append[]): number[] => {
    for (const { run, words } of batch) if (words !== undefined) runs.addWords(run, words.from, words.words)
    return sequence.append(batch)
  })

  const g = <A extends unknown[], R>(act: (...args: A) => R) => guarded(place, act)
  function* read(...args: Parameters<typeof sequence.read>): ReturnType<typeof sequence.read> {
    try {
      yield* sequence.read(...args)
    } catch (error) {
      throw asStoreError(error, place)
    }
  }
  return {
    runs: {
      create: g(runs.create),
      list: g(runs.list),
      get: g(runs.get),
      setState: g(runs.setState),
      delete: g(runs.delete),
      words: g(runs.words),
      addWords: g(runs.addWords),
    },
    sequence: {
      append: g(append),
      read,
      count: g(sequence.count),
      sourceState: g(sequence.sourceState),
      acts: g(sequence.acts),
    },
    readings: { envelope: g(readings.envelope), samples: g(readings.samples), span: g(readings.span) },
    events: { append: g(journal.events.append), list: g(journal.events.list), count: g(journal.events.count) },
    transitions: { append: g(journal.transitions.append), list: g(journal.transitions.list), count: g(journal.transitions.count) },
    ...wrapSmall(db, g),
    /** Runs `act` as one transaction: all its writes share one commit, or none happens when it throws. */
    together: <R>(act: () => R): R => g(() => db.transaction(act).immediate())(),
    /**
     * The house work: packs full staging into segments, purges deleted runs, shrinks the file; each step is a transaction of its own
     * of a few ms, and it stops after `maxMs` by `now`. Says whether some is left. Never changes what is read.
     */
    upkeep: g(
      ({ maxMs = Infinity, now = () => performance.now() }: { maxMs?: number; now?: () => number } = {}): { pending: boolean } => {
        const end = now() + maxMs
        for (const step of [packNext, purgeNext, () => reclaim.shrink(sparePages)]) {
          while (step()) if (now() >= end) return { pending: true }
        }
        return { pending: false }
      },
    ),
    /** Everything SQLite can check of the file, a line a fault; empty when sound. Reads the whole file. */
    check: g((): string[] =>
      (db.pragma('integrity_check', { simple: false }) as { integrity_check: string }[])
        .map((r) => r.integrity_check)
        .filter((r) => r !== 'ok'),
    ),
    close(): void {
      db.close()
      held?.close()
    },
  }
}

type Guard = <A extends unknown[], R>(act: (...args: A) => R) => (...args: A) => R

function wrapSmall(db: Database.Database, g: Guard) {
  const snapshots = snapshotStore(db)
  const settings = settingsStore(db)
  const audit = auditStore(db)
  return {
    snapshots: { put: g(snapshots.put), latest: g(snapshots.latest) },
    settings: { put: g(settings.put), list: g(settings.list), at: g(settings.at) },
    audit: { append: g(audit.append), list: g(audit.list) },
  }
}

export type Store = ReturnType<typeof assemble>
