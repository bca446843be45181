import { fileSource } from '../analyse.ts'
import { createCommissioning } from '../core/baseline/commission.ts'
import { commissioningPage } from '../core/baseline/page.ts'
import { round9 } from '../core/pipeline/collect.ts'
import { phases } from '../core/reading.ts'
import { readLogs } from '../ingest/csv/read-log.ts'
import { instantOf } from '../ingest/instant.ts'
import { loadSkidFile } from '../skid/skid-path.ts'
import { writeAtomic } from './atomic-file.ts'
import type { Command } from './command.ts'
import { readOptions, usage } from './options.ts'

const help = `Usage: clearbore commission LOG.csv… --skid FILE [--start T] [--json OUT|-]

Judges the step test of a clean skid and prints a page to sign: zero of each pressure drop, exponent of flow, pressure drop against
the skid file, scatter; each accepted, not accepted, or without enough data, with the reason.

The test, under the site's own procedure, with clean dry solvent and every segment clean:
  1. pumps at rest, liquid standing, 7 min
  2. a flow near the lowest of use, held steady 7 min or longer, temperatures settled
  3. at least two higher flows up to the usual one, likewise, 25 % more in all
  4. the first flow once more
Keep logging throughout; the stretches are found in the log.

  LOG.csv…      as for analyse
  --skid FILE   the skid file
  --start T     when a log with elapsed seconds or bare times of day began
  --json OUT    the record as JSON into a file, for analyse --baseline; '-' writes it to stdout instead of the page

Exit code 0 when every segment is accepted; 1 when one is not, or an input is wrong; 2 for a wrong command line; 3 when the machine fails.
`

export const commissionCommand: Command = {
  name: 'commission',
  summary: 'judge the step test of a clean skid',
  help,
  async run(args, io) {
    const text = { type: 'string' } as const
    const { values, positionals } = readOptions('commission', args, { skid: text, start: text, json: text }, true)
    if (values.skid === undefined) throw usage('commission', 'commission needs --skid FILE')
    if (positionals.length === 0) throw usage('commission', 'commission needs at least one log')
    const skid = await loadSkidFile(values.skid)
    const { blocks } = readLogs(positionals.map(fileSource), {
      skid,
      words: [...phases],
      startMs: values.start === undefined ? null : instantOf(values.start, skid.timeZone, '--start'),
      fromMs: null,
      toMs: null,
    })
    const commissioning = createCommissioning(skid)
    for await (const block of blocks) {
      io.signal.throwIfAborted()
      commissioning.rows(block)
    }
    const record = commissioning.finish()
    const json = `${JSON.stringify(record, (_, v: unknown) => (typeof v === 'number' ? round9(v) : v), 1)}\n`
    if (values.json === '-') await io.out(json)
    else {
      if (values.json !== undefined) await writeAtomic(values.json, json)
      await io.out(commissioningPage(skid, record))
    }
    return record.segments.every((s) => s.verdict === 'accepted') ? 0 : 1
  },
}
