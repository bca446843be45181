import type { Priority } from '../report.ts'

/** How bad if nobody acts. low: off-specification or repair; medium: a lost campaign, a lost margin; high: harm, gas, burst or leak. */
export const severities = ['low', 'medium', 'high'] as const
export type Severity = (typeof severities)[number]

/** Upper ends of the time bands, s: under 3, 3–10, 10–30, over 30 min (common practice). */
const bandsS = [180, 600, 1800] as const

/** Priority by severity and time band: never by the size of the deviation. Common practice after ISA-18.2 cl. 9 (from memory). */
export const priorityMatrix: Readonly<Record<Severity, readonly [Priority, Priority, Priority, Priority]>> = {
  high: ['high', 'high', 'medium', 'low'],
  medium: ['high', 'medium', 'low', 'low'],
  low: ['medium', 'low', 'low', 'low'],
}

/** Priority from severity and time to respond, s, and the reason in words (ALM-03). Over 30 min: reconsider whether it is an alarm. */
export function priorityFor(severity: Severity, timeToRespondS: number): { priority: Priority; reason: string } {
  const band = bandsS.findIndex((end) => timeToRespondS < end)
  const n = band === -1 ? 3 : band
  const words = ['under 3 min', '3 to 10 min', '10 to 30 min', 'over 30 min (reconsider whether this is an alarm)'] as const
  return {
    priority: priorityMatrix[severity][n as 0 | 1 | 2 | 3],
    reason: `${severity} severity, ${words[n as 0 | 1 | 2 | 3]} to respond`,
  }
}

export interface ResponseTimes {
  readonly detectionS: number
  readonly onDelayS: number
  readonly displayS: number
  readonly diagnosisS: number
  readonly actionS: number
  /** Residence time between the place and its effect, s. */
  readonly deadTimeS: number
}

/** Can the alarm be relied on? The sum of all delays must stay below the time to respond (ALM-04); the slack is what is left, s. */
export function responseSlackS(t: ResponseTimes, timeToRespondS: number): number {
  return timeToRespondS - (t.detectionS + t.onDelayS + t.displayS + t.diagnosisS + t.actionS + t.deadTimeS)
}
