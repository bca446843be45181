import { workedExamples } from '../core/checks/index.ts'
import { type CheckedExample, checkExample, type WorkedExample } from '../core/checks/worked-example.ts'
import type { Command } from './command.ts'

const help = `Usage: clearbore self-check

Recomputes published worked examples on this machine and prints each beside the figure as printed, with its source, the relative deviation
and whether that is within what the source's own digits and accuracy allow. A page to sign and file.

Exit code 0 when all agree; 1 when one does not; 2 for a wrong command line.
`

const digits = (value: number): string => (Number.isFinite(value) ? String(Number(value.toPrecision(6))) : 'no number')
const percent = (share: number): string => {
  if (!Number.isFinite(share)) return '-'
  const p = 100 * share
  return Math.abs(p) < 5e-4 ? '<0.001 %' : `${p >= 0 ? '+' : '−'}${Math.abs(p).toFixed(Math.abs(p) < 0.1 ? 3 : 2)} %`
}

/** The page: one example a line with its source beneath, a count, and room for a signature. */
export function selfCheckPage(results: readonly CheckedExample[]): string {
  const name = Math.max(...results.map((r) => r.example.name.length), 10)
  const head = `${'example'.padEnd(name)}  ${'printed'.padStart(10)}  ${'computed'.padStart(10)}  ${'unit'.padEnd(9)}  ${'deviation'.padStart(9)}  ${'allowed'.padStart(9)}\n`
  let subject = ''
  let body = ''
  for (const { example: e, computed, deviation, passed } of results) {
    if (e.subject !== subject) body += `\n${e.subject}\n`
    subject = e.subject
    body += `${e.name.padEnd(name)}  ${digits(e.printed).padStart(10)}  ${digits(computed).padStart(10)}  ${e.unit.padEnd(9)}  ${percent(deviation).padStart(9)}  ${percent(e.tolerance).replace('+', '±').padStart(9)}  ${passed ? 'pass' : 'FAIL'}\n    ${e.source}\n`
  }
  const failed = results.filter((r) => !r.passed).length
  return [
    'Self-check: published worked examples, recomputed here\n\n',
    head,
    body,
    `\n${results.length} examples, ${results.length - failed} within tolerance, ${failed} not.\n`,
    'Agreement shows the arithmetic, not that a skid file describes its skid. Advisory tool, no safety function.\n',
    '\nChecked by ______________________   Date ______________   Signature ______________________\n',
  ].join('')
}

/** `self-check` over a list of examples; the command of the command line takes them all. */
export const selfCheckWith = (examples: readonly WorkedExample[]): Command => ({
  name: 'self-check',
  summary: 'published worked examples, recomputed on this machine',
  help,
  async run(args, io) {
    if (args.some((a) => a === '--help' || a === '-h')) {
      await io.out(help)
      return 0
    }
    if (args.length > 0) {
      io.err(`self-check: takes no argument, got '${args[0]}'; usage: clearbore self-check\n`)
      return 2
    }
    const results = examples.map(checkExample)
    await io.out(selfCheckPage(results))
    return results.every((r) => r.passed) ? 0 : 1
  },
})

export const selfCheckCommand: Command = selfCheckWith(workedExamples)
