import { MonitorError } from '../core/errors.ts'
import { derivedPage } from '../core/figures/figures-text.ts'
import type { Skid } from '../core/skid.ts'
import { checkSkid, problemLine } from '../skid/check.ts'
import { readSkidText } from '../skid/skid-path.ts'
import type { Command } from './command.ts'

const help = `Usage: clearbore check-skid FILE

Reads a skid file (YAML or JSON) and prints every mistake in it, one a line and in file order:

  FILE:line:column: what was found; what was expected; the mend

For a good file it prints what the tool leaves out or assumes with it, and the derived figures of each segment.

Exit code 0; 1 when the file has mistakes or cannot be read; 2 for a wrong command line.
`

export interface CheckSkidOptions {
  /** The derived figures of a good file, as a page of text. */
  readonly derivedPage?: (skid: Skid) => string
}

/** The command, with the page of derived figures where one is given. Mistakes go to stderr, all about a good file to stdout. */
export const checkSkidWith = ({ derivedPage }: CheckSkidOptions = {}): Command => ({
  name: 'check-skid',
  summary: 'every mistake in a skid file, or its derived figures',
  help,
  async run(args, io) {
    if (args.some((arg) => arg === '--help' || arg === '-h')) {
      await io.out(help)
      return 0
    }
    const files = args[0] === '--' ? args.slice(1) : args
    const option = args[0] === '--' ? undefined : args.find((arg) => arg.startsWith('-'))
    const [file] = files
    if (option !== undefined || file === undefined || files.length > 1) {
      const wrong =
        option !== undefined
          ? `unknown option ${option}`
          : file === undefined
            ? 'no skid file given'
            : `one skid file at a time, got ${files.length}`
      io.err(`check-skid: ${wrong}; usage: clearbore check-skid FILE\n`)
      return 2
    }
    let text: string
    try {
      text = await readSkidText(file)
    } catch (cause) {
      if (!(cause instanceof MonitorError)) throw cause
      io.err(`${cause.line()}\n`)
      return 1
    }
    const { skid, problems, notes } = checkSkid(text, file)
    if (skid === null) {
      for (const problem of problems) io.err(`${problemLine(file, problem)}\n`)
      io.err(`${file}: ${problems.length} ${problems.length === 1 ? 'mistake' : 'mistakes'}\n`)
      return 1
    }
    await io.out(`${file}: no mistakes\n`)
    for (const note of notes) await io.out(`  note: ${note}\n`)
    if (derivedPage !== undefined) await io.out(`\n${derivedPage(skid).replace(/\n*$/, '\n')}`)
    return 0
  },
})

export const checkSkidCommand: Command = checkSkidWith({ derivedPage: (skid) => derivedPage(skid) })
