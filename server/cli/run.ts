import { analyseLog, fileSource } from '../analyse.ts'
import { type ErrorCode, MonitorError } from '../core/errors.ts'
import { loadSkid } from '../skid/check.ts'
import { meant } from '../skid/nearest.ts'
import { analyseCommand } from './analyse.ts'
import { checkSkidCommand } from './check-skid.ts'
import type { Command, Io } from './command.ts'
import { commissionCommand } from './commission.ts'
import { exportCommand } from './export.ts'
import { flushPlanCommand } from './flush-plan.ts'
import { importCommand } from './import.ts'
import { scoreCommandWith } from './score.ts'
import { selfCheckCommand } from './self-check.ts'
import { serveCommand } from './serve.ts'
import { simulateCommand } from './simulate.ts'
import { verifyCommand } from './verify.ts'

export const caution =
  'Advisory only: Clearbore reads and recommends, it moves nothing and is no safety function. It can be wrong.\nFollow approved site procedures, local codes and licensed, competent people.\n'

const score = scoreCommandWith({
  loadSkid,
  analyse: async (files, skid, { cutMs }) => (await analyseLog({ skid, sources: [fileSource(files.logFile)], toMs: cutMs })).report,
})

export const commands: readonly Command[] = [
  serveCommand,
  importCommand,
  exportCommand,
  verifyCommand,
  analyseCommand,
  checkSkidCommand,
  commissionCommand,
  simulateCommand,
  score,
  flushPlanCommand,
  selfCheckCommand,
]

/** Mistakes of the command line and failures of the machine; everything else a user can mend in the input. */
const exitCodes: Partial<Record<ErrorCode, number>> = {
  USAGE: 2,
  SIM_OPTION: 2,
  FILE_WRITE: 3,
  DISK_FULL: 3,
  PORT_TAKEN: 3,
  STORE_OPEN: 3,
  STORE_LOCKED: 3,
  STORE_CORRUPT: 3,
  STORE_SCHEMA_NEWER: 3,
}

const overview = () =>
  `Usage: clearbore COMMAND …\n\n${commands.map((c) => `  ${c.name.padEnd(12)} ${c.summary}`).join('\n')}\n\nclearbore COMMAND --help tells the rest.\n\n${caution}`

/** Runs one command and returns its exit code: 0 done, 1 the input is wrong, 2 the command line is wrong, 3 the machine failed us. */
export async function runCli(args: readonly string[], io: Io): Promise<number> {
  const [name, ...rest] = args
  if (name === undefined || name === '--help' || name === '-h' || name === 'help') {
    await io.out(overview())
    return name === undefined ? 2 : 0
  }
  const command = commands.find((c) => c.name === name)
  if (command === undefined) {
    const near = meant(
      name,
      commands.map((c) => c.name),
    )
    io.err(`clearbore: unknown command '${name}'${near === null ? '' : `; ${near}`}; clearbore --help lists them\n`)
    return 2
  }
  if (rest.includes('--help') || rest.includes('-h')) {
    await io.out(command.help)
    return 0
  }
  try {
    return await command.run(rest, io)
  } catch (error) {
    if (io.signal.aborted) {
      io.err(`clearbore ${name}: stopped\n`)
      return 3
    }
    if (error instanceof MonitorError) {
      io.err(`${error.line()}\n`)
      return exitCodes[error.code] ?? 1
    }
    const e = error as NodeJS.ErrnoException
    if (typeof e.code === 'string') {
      io.err(`clearbore ${name}: ${e.message}\n`)
      return 3
    }
    throw error
  }
}
