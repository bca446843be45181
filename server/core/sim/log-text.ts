import { MonitorError } from '../errors.ts'
import type { Skid } from '../skid.ts'
import { decimalsOf } from './instruments.ts'
import { randomOf } from './random.ts'
import type { Scenario } from './scenario.ts'
import { type SimRow, simulate } from './simulator.ts'
import type { TrueDirty } from './truth.ts'

const quoted = (text: string): string => (/[",\n\r]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text)

/** How this skid's log writes a time, and under which heading. Errors: SIM_OPTION for a form the simulator cannot write. */
function clockOf(skid: Skid, scenario: Scenario): { heading: string; format(tMs: number): string } {
  const log = skid.log[0]
  const format = log?.timeFormat[0] ?? 'iso'
  const heading = log?.time?.[0] ?? 'time'
  const known: Readonly<Record<string, (tMs: number) => string>> = {
    iso: (tMs) => new Date(tMs).toISOString(),
    'epoch-s': (tMs) => (tMs / 1000).toFixed(3),
    'epoch-ms': (tMs) => `${tMs}`,
    'elapsed-s': (tMs) => ((tMs - scenario.fromMs) / 1000).toFixed(3),
  }
  const write = known[format]
  if (write === undefined || (log?.time?.length ?? 1) > 1) {
    throw new MonitorError('SIM_OPTION', `cannot write a log with times as '${format}' in ${log?.time?.join(' and ') ?? heading}`, {
      hint: `one time column, as ${Object.keys(known).join(', ')}`,
    })
  }
  return { heading, format: write }
}

/** The run as lines of a CSV log in the skid's own form, dirt of the scenario included; `dirty()` counts it once the lines are taken. */
export function logText(skid: Skid, scenario: Scenario): { lines(): Generator<string, void>; dirty(): TrueDirty } {
  const clock = clockOf(skid, scenario)
  const decimals = skid.tags.map(decimalsOf)
  const random = randomOf(scenario.seed, 'dirt')
  const { dirt } = scenario
  const nanCells: Record<string, number> = {}
  const counted = { missingRows: 0, duplicateRows: 0, outOfOrderRows: 0, brokenRows: 0, rows: 0 }
  const text = (row: SimRow): string => {
    const most = 0.4 * scenario.logSeconds * 1000
    const tMs = row.tMs + Math.round(Math.max(-most, Math.min(most, dirt.jitterMs * random.normal())))
    let line = clock.format(tMs)
    for (let i = 0; i < decimals.length; i++) {
      const value = row.values[i]!
      const tag = skid.tags[i]!
      if (value === null && tag.quantity !== 'text') nanCells[tag.tag] = (nanCells[tag.tag] ?? 0) + 1
      line += `,${value === null ? '' : value.toFixed(decimals[i])}`
    }
    return skid.phaseColumn === null ? `${line}\n` : `${line},${row.phase}\n`
  }
  function* lines(): Generator<string, void> {
    yield `${[clock.heading, ...skid.tags.map((t) => t.column), ...(skid.phaseColumn === null ? [] : [skid.phaseColumn])].map(quoted).join(',')}\n`
    let heldBack: string | null = null
    for (const row of simulate(skid, scenario)) {
      let line = text(row)
      const draw = random.next()
      if (draw < dirt.missing) {
        counted.missingRows++
        continue
      }
      counted.rows++
      if (random.chance(dirt.broken)) {
        counted.brokenRows++
        line = `${line.slice(0, Math.floor(line.length * random.between(0.2, 0.8)))}\n`
      }
      if (heldBack === null && random.chance(dirt.outOfOrder)) {
        heldBack = line
        continue
      }
      yield line
      if (heldBack !== null) {
        counted.outOfOrderRows++
        yield heldBack
        heldBack = null
      }
      if (random.chance(dirt.duplicate)) {
        counted.duplicateRows++
        counted.rows++
        yield line
      }
    }
    if (heldBack !== null) yield heldBack
  }
  const dirty = (): TrueDirty => {
    const kinds = Object.entries({
      jitter: dirt.jitterMs,
      missing: counted.missingRows,
      duplicate: counted.duplicateRows,
      order: counted.outOfOrderRows,
      ragged: counted.brokenRows,
    })
    return { nanCells, ...counted, notes: [], kinds: kinds.filter(([, n]) => n > 0).map(([kind]) => kind) }
  }
  return { lines, dirty }
}
