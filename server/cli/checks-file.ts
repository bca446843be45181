import { readFile } from 'node:fs/promises'
import type { Acceptance } from '../core/flush/course.ts'
import type { FlushPlan } from '../core/report.ts'
import { cannotRead } from '../file-trouble.ts'
import { firstOf } from '../skid/check.ts'
import { parseSkidText } from '../skid/document.ts'
import { meant } from '../skid/nearest.ts'
import { inFileOrder } from '../skid/problem.ts'
import { choice, group, list, text } from '../skid/readers.ts'
import { walkOf } from '../skid/walk.ts'

const instant = text('a time with its zone, such as 2031-05-05T21:40:00+02:00', (value) =>
  /^\d{4}-\d{2}-\d{2}T[\d:.]+(Z|[+-]\d{2}:\d{2})$/.test(value) && Number.isFinite(Date.parse(value)) ? null : { hint: null },
)

/** One check of a plan's criterion, as a person stored it. What is missing of value, source or person counts as not accepted. */
const checkShape = (plan: FlushPlan) =>
  group(
    {
      step: choice(plan.steps.map((s) => s.id)),
      criterion: text('the id of a criterion of that step'),
      verdict: choice(['met', 'failed', 'skipped']),
      value: text('what was read or seen'),
      source: text('the tag, the laboratory, or the eye it came from'),
      quality: choice(['good', 'uncertain', 'bad']),
      person: text('who confirmed it'),
      time: instant,
      reason: text('why it failed or was skipped'),
    },
    { required: ['step', 'criterion', 'verdict', 'quality', 'time'] },
  )

/**
 * The stored checks of a flush, `checks: [ … ]`, YAML or JSON, read with the care of a skid file. Errors: SKID_FILE with the place of the first
 * mistake; a criterion that its step has not is one.
 */
export function readChecks(plan: FlushPlan, source: string, file: string): Acceptance[] {
  const wrong = (problems: Parameters<typeof firstOf>[0]) => firstOf(problems, file, null, 'see clearbore flush-plan --help')
  const { doc, lines, problems } = parseSkidText(source)
  if (doc === null) throw wrong(problems)
  const walk = walkOf(doc, lines)
  const read = group({ checks: list(checkShape(plan), { name: 'checks' }) }, { required: ['checks'] }).read(doc.contents, [], walk)
  const checks = read?.checks ?? []
  checks.forEach((c, i) => {
    const ids = plan.steps.find((s) => s.id === c?.step)?.criteria.map((x) => x.id)
    if (ids === undefined || c?.criterion === undefined || ids.includes(c.criterion)) return
    walk.say(
      ['checks', i, 'criterion'],
      `${c.step ?? ''} has no criterion '${c.criterion}'`,
      `one of ${ids.join(', ')}`,
      meant(c.criterion, ids),
    )
  })
  if (read === undefined || walk.problems.length > 0) throw wrong(inFileOrder(walk.problems))
  return checks.flatMap((c) =>
    c?.step === undefined || c.criterion === undefined || c.verdict === undefined || c.quality === undefined || c.time === undefined
      ? []
      : [
          {
            step: c.step,
            criterion: c.criterion,
            verdict: c.verdict,
            value: c.value ?? null,
            source: c.source ?? '',
            quality: c.quality,
            person: c.person ?? '',
            tMs: Date.parse(c.time),
            reason: c.reason ?? null,
          },
        ],
  )
}

/** Text of a file of checks. Errors: FILE_READ with the path. */
export async function checksText(path: string): Promise<string> {
  try {
    return await readFile(path, 'utf8')
  } catch (cause) {
    throw cannotRead(path, cause)
  }
}
