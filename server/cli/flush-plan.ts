import { MonitorError } from '../core/errors.ts'
import { type NextStep, nextStep } from '../core/flush/course.ts'
import { flushDefaults } from '../core/flush/input.ts'
import { planFlush } from '../core/flush/plan.ts'
import { nextText, planText } from '../core/flush/plan-text.ts'
import type { FlushPlan } from '../core/report.ts'
import { meant } from '../skid/nearest.ts'
import { loadSkidFile } from '../skid/skid-path.ts'
import { writeAtomic } from './atomic-file.ts'
import { checksText, readChecks } from './checks-file.ts'
import type { Command } from './command.ts'
import { readOptions } from './options.ts'

const help = `Usage: clearbore flush-plan --skid FILE --segment ID [--segment ID ...] [--ratio R ...] [--json OUT|-]

Computes the flush of one or more segments: F0 prepare, F1 displace with dry solvent, F2 warm up, F3 water, F4 dry, F5 cool again, F6 restart, each
with flow, volume, time, hold points, end criteria and hazards. Advice under the site's own procedure; it never stands in for it.

  --skid FILE       the skid file
  --segment ID      a segment to be flushed; may be repeated
  --ratio R         its present resistance over clean, 1 to 1000 (one for each --segment, in their order; default 1, said to be assumed)
  --solvent NAME    dry solvent for F1 and F4 (default: chosen from the skid's own; must mix fully with water)
  --water-ppm N     water in the effluent that ends F4, ppm by mass (default ${flushDefaults.waterPpmLimit})
  --checks FILE     the checks stored so far, YAML or JSON: checks: [{ step: F0, criterion: path-proven, verdict: met, value: 80 mL/min at
                    0.4 bar, source: FT-101, quality: good, person: M. Ovalle, time: 2031-05-05T21:40:00+02:00 }]; verdict met, failed or
                    skipped (with a reason). The page ends with the step that may come next; water is refused until F1 and F2 are accepted
  --json OUT        the plan as JSON into a file; '-' writes it to stdout instead of the page

Exit code 0; 1 when the file or a segment is wrong; 2 for a wrong command line.
`

/** The plan with what may come next. */
const asJson = (plan: FlushPlan, next: NextStep): string =>
  `${JSON.stringify({ ...plan, next: { ...next, step: next.step?.id ?? null } }, (_, v) => (typeof v === 'number' ? Number(v.toPrecision(9)) : v), 2)}\n`

const numberIn = (text: string, option: string, low: number, high: number): number => {
  const value = Number(text)
  if (text.trim() === '' || !(value >= low && value <= high))
    throw new MonitorError('USAGE', `${option} needs a number from ${low} to ${high}, got '${text}'`, {
      hint: 'clearbore flush-plan --help',
    })
  return value
}

function options(args: readonly string[]) {
  const text = { type: 'string' } as const
  const many = { type: 'string', multiple: true } as const
  const { values } = readOptions(
    'flush-plan',
    args,
    { skid: text, segment: many, ratio: many, solvent: text, 'water-ppm': text, json: text, checks: text },
    false,
  )
  const segments = values.segment ?? []
  const ratios = values.ratio ?? []
  if (values.skid === undefined || segments.length === 0)
    throw new MonitorError('USAGE', 'flush-plan needs --skid FILE and --segment ID', { hint: 'clearbore flush-plan --help' })
  if (ratios.length > segments.length)
    throw new MonitorError('USAGE', `${ratios.length} --ratio for ${segments.length} --segment`, {
      hint: 'one ratio for each segment, in their order',
    })
  return {
    skid: values.skid,
    segments,
    ratios: ratios.map((r) => numberIn(r, '--ratio', 1, 1000)),
    solvent: values.solvent ?? null,
    waterPpm:
      values['water-ppm'] === undefined ? flushDefaults.waterPpmLimit : numberIn(values['water-ppm'], '--water-ppm', 1, 100_000),
    json: values.json ?? null,
    checks: values.checks ?? null,
  }
}

/** `flush-plan`: the computed flush of a segment, as a page or as JSON. */
export const flushPlanCommand: Command = {
  name: 'flush-plan',
  summary: 'the computed flush of a segment, step by step',
  help,
  async run(args, io) {
    if (args.some((a) => a === '--help' || a === '-h')) {
      await io.out(help)
      return 0
    }
    const o = options(args)
    const skid = await loadSkidFile(o.skid)
    const ids = skid.segments.map((s) => s.id)
    for (const id of o.segments) {
      if (!ids.includes(id))
        throw new MonitorError('TAG_UNKNOWN', `no segment '${id}' in this skid`, {
          hint: meant(id, ids) ?? `one of ${ids.join(', ')}`,
          place: { file: o.skid },
        })
    }
    const plan = planFlush({
      skid,
      segments: o.segments,
      ratios: Object.fromEntries(o.ratios.map((r, i) => [o.segments[i] ?? '', r])),
      settings: { displacementSolvent: o.solvent, dryingSolvent: o.solvent, waterPpmLimit: o.waterPpm },
    })
    const next = nextStep(plan, o.checks === null ? [] : readChecks(plan, await checksText(o.checks), o.checks))
    if (o.json === '-') await io.out(asJson(plan, next))
    else {
      if (o.json !== null) await writeAtomic(o.json, asJson(plan, next))
      await io.out(`${planText(plan)}${nextText(next)}`)
    }
    return 0
  },
}
