import { MonitorError } from '../core/errors.ts'
import { checkScenario } from '../core/sim/check.ts'
import { logText } from '../core/sim/log-text.ts'
import { scenarioKinds } from '../core/sim/random-scenario.ts'
import { exothermKinds, growthLaws, type Scenario } from '../core/sim/scenario.ts'
import { eventKeys, eventKinds } from '../core/sim/scenario-text.ts'
import { rowsOf } from '../core/sim/simulator.ts'
import { truthOf } from '../core/sim/truth-of.ts'
import { loadSkid } from '../skid/check.ts'
import { openAtomic, writeAtomic } from './atomic-file.ts'
import type { Command } from './command.ts'
import { progressLine } from './progress-line.ts'
import { parsed, readText, scenarioFrom, usage } from './simulate-options.ts'

const help = `Usage: clearbore simulate --skid FILE --hours H --seed N --out LOG.csv [options]

Writes the log of an invented run on a skid, and what truly happened in it. The same options give the same bytes.

  --skid FILE           the skid file (YAML or JSON)
  --hours H             length of the run, hours
  --seed N              a whole number; other seed, other run
  --out LOG.csv         where the log goes; '-' writes it to stdout
  --truth FILE          where the truth goes (JSON)
  --fouling SEGMENT[:LAW[:ONSET[:TO_LIMIT]]]    a deposit; LAW ${growthLaws.join(', ')} (default linear), ONSET hours after the
                        start (default 0.5), TO_LIMIT hours from onset to the dP limit, about (default 4); repeatable
  --exotherm SEGMENT[:KIND[:AT]]                a temperature excursion; KIND ${exothermKinds.join(', ')} (default ignition),
                        AT hours after the start (default half way); repeatable
  --event KIND:key=value,...                    anything else, as flowStep:at=2,factor=1.1; repeatable. Kinds and their keys:
${eventKinds
  .map(
    (k) =>
      `                          ${k}: ${eventKeys(k)
        .map((key) => (key === 'atHours' ? 'at' : key))
        .join(', ')}`,
  )
  .join('\n')}
  --scenario FILE.json|random:KIND|demo         a whole scenario from a file, drawn from the seed (${scenarioKinds.join(', ')}), or the demo
  --log-seconds S       a row every S seconds (default 1)
  --from T              start, RFC 3339 (default 2031-05-05T18:00:00Z)
  --noise X             scales noise and disturbances (default 1; 0: none)
`

/** Lines are gathered into pieces of about this many characters before they are written. */
const PIECE = 1 << 16

export const simulateCommand: Command = {
  name: 'simulate',
  summary: 'write the log of an invented run, with its truth',
  help,
  async run(args, io) {
    const o = parsed(args)
    const { skid: skidFile, out } = o
    if (skidFile === undefined) return usage('simulate needs --skid FILE')
    if (out === undefined) return usage('simulate needs --out LOG.csv')
    const skid = loadSkid(await readText(skidFile), skidFile)
    let scenario: Scenario
    try {
      scenario = await scenarioFrom(o, skid)
      checkScenario(skid, scenario)
    } catch (error) {
      // What the options ask for is a mistake of the command line; what a scenario file says has its place in the file.
      if (error instanceof MonitorError && error.code === 'SIM_OPTION' && error.place === null)
        throw new MonitorError('USAGE', error.message, { hint: error.hint ?? 'clearbore simulate --help', cause: error })
      throw error
    }
    const log = logText(skid, scenario)
    const file = out === '-' ? null : await openAtomic(out)
    const line = progressLine(io, 'simulate', rowsOf(scenario), 'rows')
    let piece = ''
    let rows = -1
    const flush = async () => {
      if (file === null) await io.out(piece)
      else await file.write(piece)
      piece = ''
    }
    try {
      for (const text of log.lines()) {
        piece += text
        rows++
        if (piece.length < PIECE) continue
        io.signal.throwIfAborted()
        line.update(rows)
        await flush()
      }
      await flush()
      const truth = o.truth === undefined ? null : `${JSON.stringify(truthOf(skid, scenario, log.dirty()), null, 1)}\n`
      if (o.truth !== undefined && truth !== null) await writeAtomic(o.truth, truth)
    } catch (error) {
      await file?.discard()
      throw error
    } finally {
      line.end()
    }
    await file?.commit()
    return 0
  },
}
