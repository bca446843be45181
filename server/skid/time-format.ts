/** Time formats with a name; anything else is a pattern. */
export const namedTimeFormats = ['iso', 'epoch-s', 'epoch-ms', 'elapsed-s', 'time-of-day'] as const

/** Runs of letters a pattern may hold: year, month, day, hour 0-23 and 1-12, minute, second, its fraction, am or pm. */
const field = /^(?:yyyy|yy|MM?|dd?|HH?|hh?|mm?|ss?|S{1,9}|a)$/
/** What each field tells; two of one kind contradict each other. */
const kindOf = (run: string): string => (run[0] === 'h' ? 'H' : run[0]!)

export const timeFormatSays = `${namedTimeFormats.join(', ')} or a pattern of yyyy MM dd HH mm ss SSS a, for example "dd/MM/yyyy HH.mm.ss"`

/**
 * What is wrong with a time format and how to mend it, or null. A pattern names the whole date (year, month, day), or hour and minute,
 * or both: a date alone is for a date column whose time stands behind it or in a second column. Text between apostrophes, T, Z and all
 * that is no letter stand for themselves.
 */
export function timeFormatMend(format: string): string | null {
  if ((namedTimeFormats as readonly string[]).includes(format)) return null
  if (format.includes('%')) return 'letters without %: yyyy-MM-dd HH:mm:ss'
  const bare = format.replace(/'[^']*'/g, ' ')
  if (bare.includes("'")) return "close the apostrophe: 'T'"
  const runs = (bare.match(/(\p{L})\1*/gu) ?? []).filter((run) => run !== 'T' && run !== 'Z')
  if (runs.length === 0) return 'for example yyyy-MM-dd HH:mm:ss'
  const kinds = new Set<string>()
  for (const run of runs) {
    if (/^Y+$|^D+$/.test(run)) return `'${run.toLowerCase()}' for '${run}' (small letters for year and day)`
    if (!field.test(run)) return `'${run}' is no field; literal text stands between apostrophes`
    const kind = kindOf(run)
    if (kinds.has(kind)) return kind === 'm' ? "'MM' is the month, 'mm' the minute" : `'${run}' says again what another field says`
    kinds.add(kind)
  }
  const date = ['y', 'M', 'd'].filter((kind) => kinds.has(kind)).length
  if (date !== 0 && date !== 3)
    return kinds.has('m') && !kinds.has('M') ? "'MM' is the month, 'mm' the minute" : 'year, month and day, or none of them'
  if (kinds.has('H') ? !kinds.has('m') : date === 0 || ['m', 's', 'S', 'a'].some((kind) => kinds.has(kind)))
    return 'hour and minute are needed: HH:mm'
  if (runs.some((run) => run[0] === 'h') && !kinds.has('a'))
    return "'hh' is the 12-hour clock and needs 'a' (am or pm); 'HH' is the 24-hour clock"
  if (runs.some((run) => run[0] === 'H') && kinds.has('a')) return "'a' (am or pm) goes with 'hh'"
  return null
}
