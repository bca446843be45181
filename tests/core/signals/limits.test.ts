import { describe, expect, it } from 'vitest'
import { siteRules } from '../../../server/core/signals/site-rules.ts'
import { twoSegments } from '../../helpers/skids.ts'
import { hear, type Reading } from './world.ts'

const skid = twoSegments()
const during =
  (from: number, to: number, over: Reading, more: Reading = {}) =>
  (k: number): Reading =>
    k >= from && k < to ? over : more
/** ΔP of S1 stands 1 s later in a closed scan than in its row. */
const dpHigh = (of: (k: number) => Reading, n = 200, everyS = 1, of2 = skid) =>
  hear(of2, n, of, everyS).filter((a) => a.kind === 'dp-limit')
/** From 2 bar, 4.3 and back: the limit is 4.0, its deadband 2 % of it, 0.08. */
const high: Reading = { p1: 8.8 }

// A leap of 2 bar is believed with its third reading (the two before may be a spike), and a scan speaks at its end: 3 scans beside each delay.
describe('a limit of ΔP at 4.0 bar, with 15 s on-delay and off-delay and 0.08 bar deadband', () => {
  // ALM-12
  it('is raised 15 s after a leap over it is believed and cleared 15 s after the way back is; 14 s over raise nothing', () => {
    expect(dpHigh(during(100, 117, high))).toEqual([])
    const [alarm, ...more] = dpHigh(during(100, 130, high))
    expect(more).toEqual([])
    expect(alarm).toMatchObject({ segment: 'S1', priority: 'medium' })
    expect(alarm!.raisedS).toBe(100 + 3 + 15)
    expect(alarm!.clearedS).toBe(130 + 3 + 15)
  })

  it('stays while ΔP is below the limit by less than the deadband, 3.96 bar, and is one occurrence', () => {
    const [alarm, ...more] = dpHigh((k) => (k < 100 ? {} : k < 130 ? high : { p1: 8.46 }))
    expect(more).toEqual([])
    expect(alarm!.clearedS).toBeNull()
  })

  it('on a 5-s grid waits as long, 15 s in three scans; on a 0.1-s grid 1.5 s, as a run there lives for minutes', () => {
    const five = { ...skid, scanSeconds: 5, lateSeconds: 10 }
    expect(dpHigh(during(20, 30, high), 60, 5, five)[0]!.raisedS).toBe(100 + 15 + 15)
    const tenth = { ...skid, scanSeconds: 0.1, lateSeconds: 0.2 }
    expect(dpHigh(during(1000, 1100, high), 1300, 0.1, tenth)[0]!.raisedS).toBeCloseTo(100 + 0.3 + 1.5, 6)
  })
})

describe('a bad input', () => {
  // ALM-06
  it('never clears: with PT-2 empty for 60 s while ΔP has come back, the alarm stands until 15 s after readings return', () => {
    const [alarm] = dpHigh((k) => (k >= 100 && k < 120 ? high : k >= 120 && k < 180 ? { p2: null } : {}), 260)
    expect(alarm!.raisedS).toBe(118)
    expect(alarm!.clearedS).toBe(180 + 1 + 15)
  })

  it('never raises: 10 s over, 10 s empty, 10 s over is no 15 s over', () => {
    expect(
      dpHigh((k) => ((k >= 100 && k < 110) || (k >= 120 && k < 130) ? high : k >= 110 && k < 120 ? { ...high, p2: null } : {})),
    ).toEqual([])
  })
})

describe('a logger that jitters', () => {
  it('leaves scans empty and resets no delay: rows of 1.03 s, every 33rd scan empty, and the alarm comes 15 to 17 s after the leap is believed', () => {
    const alarms = dpHigh(during(100, 140, high), 200, 1.03)
    expect(alarms).toHaveLength(1)
    expect(alarms[0]!.raisedS - 106).toBeGreaterThanOrEqual(15)
    expect(alarms[0]!.raisedS - 106).toBeLessThanOrEqual(17)
  })

  it('nor do rows that say nothing of a tag: with every third without PT-1 the alarm comes 15 to 18 s after the leap is believed', () => {
    const alarms = dpHigh((k) => ({ ...(k >= 100 && k < 140 ? high : {}), ...(k % 3 === 0 ? { p1: undefined } : {}) }))
    expect(alarms).toHaveLength(1)
    expect(alarms[0]!.raisedS - 103).toBeGreaterThanOrEqual(15)
    expect(alarms[0]!.raisedS - 103).toBeLessThanOrEqual(18)
  })
})

describe('limits of temperature and flow', () => {
  it('over 40 °C is a high alarm of the segment and its thermocouple after 2 s; 60 s before production it is none', () => {
    // A rise of 0.4 K/s: fast enough for the test, slow enough to be believed.
    const warm = (k: number): Reading => ({ t1: Math.min(44, 20 + Math.max(0, 0.4 * (k - 400))) })
    const alarm = hear(skid, 600, warm).find((a) => a.kind === 'temperature-limit' && a.priority === 'high')!
    expect(alarm).toMatchObject({ segment: 'S1', tag: 'TT-1' })
    expect(alarm.raisedS - 450).toBeGreaterThanOrEqual(1)
    expect(alarm.raisedS - 450).toBeLessThanOrEqual(5)
    expect(hear(skid, 600, (k) => ({ ...warm(k), phase: 'startup' })).filter((a) => a.kind === 'temperature-limit')).toEqual([])
  })

  it('a flow of 1.5 kg/h under its limit of 2 is raised after 15 s while a step of production lasts, and not in a flush', () => {
    const low = (phase: string) =>
      hear(skid, 500, (k) => ({ flow: k < 420 ? 6 : 1.5, p1: k < 420 ? 6.5 : 4.9, phase })).filter((a) => a.key.endsWith('flowLow'))
    const [alarm] = low('production')
    expect(alarm).toMatchObject({ kind: 'flow', segment: 'S1', tag: 'FT-1' })
    expect(alarm!.raisedS).toBe(420 + 3 + 15)
    expect(low('flush')).toEqual([])
  })
})

describe('what the site says of an alarm', () => {
  const site = (of: string) => twoSegments(`alarms:\n  dp-limit: ${of}\n  "dp-limit:S2": { priority: low }`)
  it('changes priority, delays and deadband, by kind and then by segment', () => {
    const own = site('{ priority: high, onDelaySeconds: 4, offDelaySeconds: 30, deadband: 0.5 }')
    const of = (k: number): Reading => (k >= 100 && k < 120 ? { p1: 11.6, p2: 7.3, p3: 3 } : k >= 120 && k < 150 ? { p1: 8.2 } : {})
    const alarms = dpHigh(of, 260, 1, own)
    expect(alarms.map((a) => [a.segment, a.priority, a.raisedS])).toEqual([['S1', 'high', 107], ['S2', 'low', 107]]) // biome-ignore format: a table
    // S1 at 3.7 bar is within 0.5 bar of the limit until 150 s, then 3 s and 30 s off-delay.
    expect(alarms[0]!.clearedS).toBe(183)
    expect(alarms[1]!.clearedS).toBe(153)
  })

  it('makes an alarm latching: returned to normal it stays in the list until it is reset; one not named does not', () => {
    const rules = siteRules(site('{ latching: true }'))
    expect(rules.policyOf('dp-limit:S1:dpHighBar', 'medium').latching).toBe(true)
    expect(rules.policyOf('pressure-limit:S1:pressureHighBar', 'high').latching).toBe(false)
  })
})
