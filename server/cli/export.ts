import { type ExportKind, exportKinds, exportRun } from '../export-run.ts'
import { instantOf } from '../ingest/instant.ts'
import { createCatalogue } from '../monitor/catalogue.ts'
import { loadSkid } from '../skid/check.ts'
import { openStore } from '../store/open.ts'
import { openAtomic, writeAtomic } from './atomic-file.ts'
import type { Command } from './command.ts'
import { toolVersion } from './install.ts'
import { storeOptions } from './key-folder.ts'
import { readOptions, usage, wholeIn } from './options.ts'

const help = `Usage: clearbore export RUN --data DIR --what ${exportKinds.join('|')} --format csv|json --out FILE

Writes a stored run, by its number in the list, into a file. May run beside a server on the same folder.

  --what alarms    every transition with time, person and reason (csv), with the occurrences beside it (json)
  --what samples   the readings as a log in order of arrival, times in UTC (csv); reads back to the same values
  --what events    what people entered: results, changes of drum and filter, comments (csv); reads back with --events
  --what record    the whole recorded sequence, its journal and report (json); clearbore can analyse it again
  --out FILE       '-' writes to stdout. Beside a csv file, FILE.facts.json says what it is: run, tool and configuration
                   version, period, filter, time zone, number of rows, cautions
  --from T --to T --kind K --segment S --priority P    alarms only: leave out the rest
  --data DIR       the store's folder (default .clearbore)
  --keys DIR       where the key that signs records lies (default CLEARBORE_KEYS, else this user's state folder)

Exit code 0; 1 when there is no such run; 2 for a wrong command line; 3 when the machine fails.
`

const text = { type: 'string' } as const

export const exportCommand: Command = {
  name: 'export',
  summary: 'write a stored run into a file: alarms, readings or the whole record',
  help,
  async run(args, io) {
    const { values: v, positionals } = readOptions(
      'export',
      args,
      {
        data: text,
        what: text,
        format: text,
        out: text,
        from: text,
        to: text,
        kind: text,
        segment: text,
        priority: text,
        keys: text,
      },
      true,
    )
    if (positionals.length !== 1) throw usage('export', `export needs one RUN, got ${positionals.length}`)
    const run = wholeIn('export', 'RUN', positionals[0]!, 1, Number.MAX_SAFE_INTEGER)
    const what = v.what as ExportKind | undefined
    if (what === undefined || !exportKinds.includes(what)) throw usage('export', `export needs --what ${exportKinds.join('|')}`)
    if (v.format === 'pdf') throw usage('export', 'this version writes no PDF yet; csv and json it does')
    if (v.format !== 'csv' && v.format !== 'json') throw usage('export', 'export needs --format csv|json')
    if (v.out === undefined) throw usage('export', 'export needs --out FILE')
    const isFiltered = [v.from, v.to, v.kind, v.segment, v.priority].some((f) => f !== undefined)
    if (isFiltered && what !== 'alarms') throw usage('export', 'only alarms can be filtered')

    const store = openStore(v.data ?? '.clearbore', { readonly: true, ...storeOptions(io, v.keys) })
    try {
      const idle = {
        engine: () => null,
        clock: () => ({ kind: 'wall' as const, nowMs: 0, speed: 1 }),
        sourceFault: () => null,
        importing: () => null,
      }
      const catalogue = createCatalogue(store, loadSkid, idle)
      const parts = catalogue.parts(run)
      const at = (t: string | undefined, option: string): number | null =>
        t === undefined ? null : instantOf(t, parts.skid.timeZone, option)
      const out = exportRun({
        parts,
        row: catalogue.row(run),
        live: null,
        what,
        format: v.format,
        filter: {
          fromMs: at(v.from, '--from'),
          toMs: at(v.to, '--to'),
          kind: v.kind ?? null,
          segment: v.segment ?? null,
          priority: v.priority ?? null,
        },
        toolVersion: toolVersion(),
        nowMs: Date.now(),
      })
      if (v.out === '-') {
        for (const piece of out.pieces) await io.out(piece)
        return 0
      }
      const file = await openAtomic(v.out)
      try {
        for (const piece of out.pieces) {
          io.signal.throwIfAborted()
          await file.write(piece)
        }
      } catch (error) {
        await file.discard()
        throw error
      }
      await file.commit()
      if (v.format === 'csv') await writeAtomic(`${v.out}.facts.json`, `${JSON.stringify(out.facts, null, 1)}\n`)
      io.err(`${v.out}: ${out.facts.rows} ${what === 'alarms' ? 'records' : 'rows'} of run ${run}\n`)
      return 0
    } finally {
      store.close()
    }
  },
}
