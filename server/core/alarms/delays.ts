/** What is alarmed on: a plain variable, an excursion found by a detector with its own persistence, or a derived chart. */
export type Signalled = 'flow' | 'temperature' | 'exotherm' | 'pressure' | 'level' | 'derived' | 'quality'

/**
 * Deadband, % of range, and on- and off-delay, s, to start from. Deadbands: EEMUA 191 as quoted in the trade literature (level: one source says
 * 2); delays: ISA-18.2 / EEMUA 191 guidance (from memory). Exotherm and derived signals come from detectors that wait by themselves.
 */
const starts: Readonly<Record<Signalled, readonly [deadbandPct: number, onS: number, offS: number]>> = {
  flow: [5, 15, 15],
  temperature: [1, 60, 60],
  exotherm: [0, 0, 60],
  pressure: [2, 15, 15],
  level: [5, 60, 60],
  derived: [0, 0, 0],
  quality: [0, 0, 30],
}

export interface DelayBasis {
  readonly scanS: number
  /** Residence time of the reactor it feeds or is in, s; null unknown. */
  readonly residenceS: number | null
  /** Time to respond, s. */
  readonly timeToRespondS: number
}

/**
 * Delays for one skid: the starting value, for flow no more than half the residence time, and no more than a tenth of the time to respond (the
 * generic 60 s for temperature is wrong for a reactor with seconds of residence time); then whole scans, at least one where there is a delay
 * at all, so that one sample over the limit stays no alarm at any scan.
 */
export function delays(of: Signalled, b: DelayBasis): { deadbandPct: number; onDelayS: number; offDelayS: number } {
  const [deadbandPct, on, off] = starts[of]
  const capped = Math.min(on, 0.1 * b.timeToRespondS, of === 'flow' && b.residenceS !== null ? b.residenceS / 2 : on)
  const whole = (s: number) => (s === 0 ? 0 : Math.max(1, Math.round(s / b.scanS)) * b.scanS)
  return { deadbandPct, onDelayS: whole(capped), offDelayS: whole(off) }
}
