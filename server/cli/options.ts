import { type ParseArgsConfig, parseArgs } from 'node:util'
import { MonitorError } from '../core/errors.ts'
import { nearest } from '../skid/nearest.ts'

type Spec = NonNullable<ParseArgsConfig['options']>

/** The options of a command. Errors: USAGE, with the nearest option where one is unknown. */
export function readOptions<const S extends Spec>(command: string, args: readonly string[], options: S, allowPositionals: boolean) {
  try {
    return parseArgs({ args: [...args], options, allowPositionals })
  } catch (cause) {
    const name = (a: string): string => a.slice(2).split('=')[0]!
    const unknown = args.find((a) => a.startsWith('--') && a !== '--' && !Object.hasOwn(options, name(a)))
    const near = unknown === undefined ? null : nearest(name(unknown), Object.keys(options))
    throw new MonitorError('USAGE', (cause instanceof Error ? cause.message : String(cause)).split('. ')[0]!, {
      hint: near === null ? `clearbore ${command} --help` : `did you mean '--${near}'?`,
      cause,
    })
  }
}

export const usage = (command: string, message: string): MonitorError =>
  new MonitorError('USAGE', message, { hint: `clearbore ${command} --help` })

/** A whole number in a range. Errors: USAGE. */
export function wholeIn(command: string, option: string, text: string, low: number, high: number): number {
  const n = Number(text)
  if (text.trim() === '' || !Number.isInteger(n) || n < low || n > high)
    throw usage(command, `${option} needs a whole number from ${low} to ${high}, got '${text}'`)
  return n
}
