import type { AdviceReport, AlarmKind, Cause } from '../../server/core/report.ts'
import type { LimitName } from '../../server/core/sequence.ts'
import type { ZoneClock } from './clock.ts'

/** What the tool's names are called on the pages. */
export const kindWords: Readonly<Record<AlarmKind, string>> = {
  fouling: 'flow resistance rising',
  'dp-limit': 'ΔP over its limit',
  'pressure-limit': 'pressure over its limit',
  exotherm: 'exotherm',
  'temperature-limit': 'temperature beyond its limit',
  'feed-ratio': 'feed ratio off',
  flow: 'flow low',
  sensor: 'reading not to be trusted',
  'no-data': 'no data',
  monitor: 'monitor',
}

export const causeWords: Readonly<Record<Cause, string>> = {
  fouling: 'wall deposit',
  blockage: 'bridging or a plug',
  filter: 'filter loading',
  'back-pressure': 'back pressure',
  composition: 'composition or flow reading',
  pump: 'pump',
  ice: 'ice',
  sensor: 'sensor',
  gas: 'gas',
  unknown: 'cause not known',
}

export const limitWords: Readonly<Record<LimitName, { readonly name: string; readonly unit: string | null }>> = {
  dpHighBar: { name: 'ΔP limit', unit: 'bar' },
  dpHighHighBar: { name: 'ΔP high-high', unit: 'bar' },
  pressureHighBar: { name: 'pressure limit', unit: 'bar' },
  temperatureHighC: { name: 'limit', unit: 'degC' },
  temperatureHighHighC: { name: 'high-high', unit: 'degC' },
  temperatureLowC: { name: 'low limit', unit: 'degC' },
  flowLow: { name: 'low flow limit', unit: null },
}

/** What is advised, short enough to be read from three metres; never a command, never a permission. */
export const actionWords: Readonly<Record<AdviceReport['action'], string>> = {
  flush: 'Flush advised',
  watch: 'Watch closely',
  'stop-feed': 'Feed stop advised',
  escalate: 'Call for help',
  'change-filter': 'New filter advised',
  'check-sensor': 'Sensor check',
  'check-flow': 'Flow check',
  'check-outlet': 'Outlet check',
  'check-cooling': 'Cooling check',
  'stop-cooling': 'Stop of cooling advised',
}

/** A sentence of the tool with its instants in the plant's time and its limits by the name people use. */
export const inPlantTime = (text: string, clock: ZoneClock, nowMs: number): string =>
  text
    .replace(/\b(dp|pressure|temperature|flow)(High|HighHigh|Low)(Bar|C)?\b/g, (name) =>
      name in limitWords ? `the ${limitWords[name as LimitName].name}` : name,
    )
    .replace(/\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d(?:\.\d+)?Z/g, (iso) => {
      const tMs = Date.parse(iso)
      return Number.isNaN(tMs) ? iso : clock.day(tMs) === clock.day(nowMs) ? clock.hm(tMs) : `${clock.day(tMs)} ${clock.hm(tMs)}`
    })
