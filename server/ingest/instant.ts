import { MonitorError } from '../core/errors.ts'
import { LocalClock } from './csv/zone.ts'

/** An instant given on the command line: ISO 8601 with a zone, or without one in `timeZone`. Errors: USAGE naming the option. */
export function instantOf(text: string, timeZone: string, option: string): number {
  const m = /^(\d{4})-(\d{2})-(\d{2})(?:[T ](\d{2}):(\d{2})(?::(\d{2})(?:[.,](\d{1,3}))?)?)?(Z|[+-]\d{2}:?\d{2})?$/i.exec(
    text.trim(),
  )
  const bad = (): never => {
    throw new MonitorError('USAGE', `${option} must be a time such as 2031-05-05T18:00:00Z, got '${text}'`, {
      hint: `without a zone it is read in ${timeZone}`,
    })
  }
  if (m === null) return bad()
  const [, y, mo, d, h = '00', mi = '00', s = '00', f = '0', zone] = m
  const wall = Date.UTC(Number(y), Number(mo) - 1, Number(d), Number(h), Number(mi), Number(s), Number(f.padEnd(3, '0')))
  if (
    !Number.isFinite(wall) ||
    new Date(wall).getUTCDate() !== Number(d) ||
    Number(mo) > 12 ||
    Number(h) > 24 ||
    Number(mi) > 59 ||
    Number(s) > 60
  )
    return bad()
  if (zone === undefined) return new LocalClock(timeZone).toUtc(wall, Number.NaN)
  if (/^z$/i.test(zone)) return wall
  const sign = zone.startsWith('-') ? -1 : 1
  const digits = zone.replace(/\D/g, '')
  return wall - sign * (Number(digits.slice(0, 2)) * 60 + Number(digits.slice(2))) * 60_000
}
