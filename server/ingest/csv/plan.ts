import type { Dialect } from './dialect.ts'
import { longColumns, matchColumns, type Wanted } from './header.ts'
import { use } from './rows.ts'

/** What each column of a file of this dialect is for (see `use`), and its place in the row, −1 for none. */
export function columnPlan(
  name: string,
  dialect: Dialect,
  wanted: readonly Wanted[],
): { uses: Int16Array; slots: readonly number[]; isLong: boolean } {
  const { slots } = matchColumns(name, dialect.headerLine, dialect.header, wanted, dialect.time)
  const uses = Int16Array.from(slots, (s) => (s < 0 ? use.skip : wanted[s]!.isText ? use.textFrom + s : s))
  uses[dialect.time[0]!] = use.time
  if (dialect.time[1] !== undefined) uses[dialect.time[1]] = use.time2
  const long = dialect.layout === 'long' ? longColumns(dialect.header) : null
  if (long !== null) {
    uses[long.tag] = use.tag
    uses[long.value] = use.value
    if (long.quality !== null) uses[long.quality] = use.quality
  }
  return { uses, slots, isLong: long !== null }
}
