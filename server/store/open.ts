import { accessSync, constants, existsSync, mkdirSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { MonitorError } from '../core/errors.ts'
import { actTable } from './acts.ts'
import { auditStore } from './audit.ts'
import { asStoreError, guarded, guardedAll } from './fault.ts'
import { headTable } from './heads.ts'
import { journalStore } from './journal.ts'
import { ledger as ledgerOf } from './ledger.ts'
import { checkSchema, migrate, seen } from './migrate.ts'
import { peopleStore } from './people.ts'
import { readingStore } from './readings.ts'
import { reclaimer } from './reclaim.ts'
import { runStore } from './runs.ts'
import { seals as sealsOf } from './seals.ts'
import { segmentTable } from './segments.ts'
import { type Append, sequenceWriter } from './sequence.ts'
import { sequenceReader } from './sequence-read.ts'
import { settingsStore } from './settings.ts'
import { snapshotStore } from './snapshots.ts'
import { stageTable } from './stage-table.ts'
import { trailStore } from './trail-store.ts'

export interface StoreOptions {
  /** FULL (default): a commit is on the disk when it returns. NORMAL: it survives a crash of the process, not of the machine. */
  readonly synchronous?: 'FULL' | 'NORMAL'
  /** Looks only; may be opened beside the process that writes. */
  readonly readonly?: boolean
  /** A further connection of the process that holds the store already (a worker thread): takes no lock of its own. */
  readonly joined?: boolean
  /** Largest size of the database [pages of 4096 bytes]; past it writes fail as on a full disk. */
  readonly maxPages?: number
  /** Folder outside the data where the keys of stores lie; without it heads are not signed. */
  readonly keys?: string
  /** Named in the first record of the store. */
  readonly toolVersion?: string
  /** Clock of the process, ms since 1970 UTC. */
  readonly wallMs?: () => number
}

const fileName = 'clearbore.db'
const pageBytes = 4096
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
    const wallMs = options.wallMs ?? Date.now
    folder(dir, readonly)
    const held = readonly || options.joined === true ? null : lock(dir)
    let db: Database.Database | null = null
    try {
      db = new Database(join(dir, fileName), { readonly, timeout: 5000 })
      if (!readonly) {
        if (seen(db) === 0) {
          // On a file that has them already these would write to it.
          db.pragma(`page_size = ${pageBytes}`)
          db.pragma('auto_vacuum = INCREMENTAL')
          db.pragma('journal_mode = WAL')
        }
        db.pragma(`synchronous = ${options.synchronous ?? 'FULL'}`)
        db.pragma('journal_size_limit = 67108864')
        if (options.maxPages !== undefined) db.pragma(`max_page_count = ${options.maxPages}`)
      }
      db.pragma('foreign_keys = ON')
      // Readings are written once and mostly read once; what is read again the system keeps.
      db.pragma('cache_size = -4096')
      if (readonly) checkSchema(db)
      else migrate(db, wallMs, options.toolVersion ?? 'unknown')
      const store = assemble(db, held, place, wallMs)
      if (options.keys !== undefined && options.joined !== true) store.trail.unlock(options.keys, dir, readonly)
      return store
    } catch (error) {
      db?.close()
      held?.close()
      throw error
    }
  })()
}

function assemble(db: Database.Database, held: Database.Database | null, place: string, wallMs: () => number) {
  const ledger = ledgerOf(db, wallMs)
  const seals = sealsOf(db, ledger, wallMs)
  const segments = segmentTable(db, ledger)
  const tables = { heads: headTable(db), acts: actTable(db, ledger), stages: stageTable(db), segments }
  const audit = auditStore(db, ledger, wallMs)
  const runs = runStore(db, ledger, audit, seals.soon)
  const sequence = sequenceWriter(tables)
  const readEntries = sequenceReader(db, tables)
  const journal = journalStore(db, ledger)
  const reclaim = reclaimer(db)
  const packNext = db.transaction(() => sequence.packNext()).immediate
  const purgeNext = db.transaction(() => reclaim.purgeNext()).immediate

  function* read(...args: Parameters<typeof readEntries>): ReturnType<typeof readEntries> {
    try {
      yield* readEntries(...args)
    } catch (error) {
      throw asStoreError(error, place)
    }
  }
  const g = <A extends unknown[], R>(act: (...args: A) => R) => guarded(place, act)
  const all = <T extends { readonly [name: string]: unknown }>(functions: T): T => guardedAll(place, functions)
  const { packNext: _, append, ...sequenceRest } = sequence
  return {
    runs: all(runs),
    sequence: {
      ...all(sequenceRest),
      /**
       * Durable on return: one transaction for all of them, words included. Gives each run's next number.
       * Errors: STORE_DATA, DISK_FULL; then nothing of it is kept.
       */
      append: g(
        db.transaction((batch: readonly Append[]): number[] => {
          for (const { run, words } of batch) if (words !== undefined) runs.addWords(run, words.from, words.words)
          return append(batch)
        }).immediate,
      ),
      /**
       * A run's entries in the exact recorded order, from number `fromSeq` on; rows may come in other block sizes than they were
       * appended in. The blocks are the reader's own. Entries appended while reading come too, packing while reading does not matter.
       * Errors: STORE_DATA, STORE_CORRUPT.
       */
      read,
    },
    readings: all(readingStore(db, tables)),
    events: all(journal.events),
    transitions: all(journal.transitions),
    snapshots: all(snapshotStore(db)),
    settings: all(settingsStore(db, ledger)),
    audit: all(audit),
    people: all(peopleStore(db)),
    trail: all(trailStore(db, ledger, seals)),
    /** Runs `act` as one transaction: all its writes share one commit, or none happens when it throws. */
    together: <R>(act: () => R): R => g(() => db.transaction(act).immediate())(),
    /**
     * The house work: packs full staging into segments, purges deleted runs, shrinks the file; each step is a transaction of its own
     * of a few ms, and it stops after `maxMs` by `now`. Says whether some is left. Never changes what is read. Free space up to `spareMb`
     * stays in the file: staging takes and frees pages all the time.
     */
    upkeep: g(({ maxMs = Infinity, spareMb = 16, now = () => performance.now() }: Upkeep = {}): { pending: boolean } => {
      seals.seal()
      const end = now() + maxMs
      for (const step of [packNext, purgeNext, () => reclaim.shrink((spareMb * 2 ** 20) / pageBytes)]) {
        while (step()) if (now() >= end) return { pending: true }
      }
      return { pending: false }
    }),
    /** Everything that can be checked of the file, a line a fault; empty when sound. Reads and decodes the whole of it. */
    check: g((): string[] => {
      const found = (db.pragma('integrity_check') as { integrity_check: string }[])
        .map((row) => row.integrity_check)
        .filter((line) => line !== 'ok')
      for (const { id, title } of runs.list()) {
        try {
          for (const _ of read(id));
          segments.visit(id, tables.heads.get(id).packed, -Infinity, Infinity, (node) => {
            segments.page(node.id)
            return false
          })
        } catch (error) {
          if (!(error instanceof MonitorError)) throw error
          found.push(`run ${id} (${title}): ${error.message}`)
        }
      }
      return found
    }),
    /** Signs the heads once more. */
    close(): void {
      try {
        seals.seal(true)
      } catch {
        // A full disk leaves the last minute unsigned; the next start signs it.
      }
      db.close()
      held?.close()
    },
  }
}

interface Upkeep {
  readonly maxMs?: number
  readonly spareMb?: number
  readonly now?: () => number
}

export type Store = ReturnType<typeof assemble>
