import { group, list, number, oneOrMore, type Read, text } from './readers.ts'
import { timeFormatMend, timeFormatSays } from './time-format.ts'

const timeFormat = text(timeFormatSays, (value) => {
  const mend = timeFormatMend(value)
  return mend === null ? null : { hint: mend }
})

/** How one logger writes. Keys beyond the contract's: `files` (a pattern on the file's name, * and ?) and `clockOffsetSeconds`. */
const oneLog = group({
  files: text('a file name pattern such as "pump_*.csv"', (value) =>
    /[\\/]/.test(value) ? { hint: "the file's name alone, without folders" } : null,
  ),
  time: oneOrMore(text('the name of the time column, or [Date, Time]'), 2),
  timeFormat: oneOrMore(timeFormat),
  missing: list(number(), { name: 'numbers' }),
  clockOffsetSeconds: number({ min: -1e9, max: 1e9, unit: 'seconds, added to every time of these files' }),
})

/** `log`: one logger, or a list: the first entry whose pattern fits a file's name is taken, else the one without a pattern. */
export const logShape = oneOrMore(oneLog)
export type LogFile = Read<typeof oneLog>
