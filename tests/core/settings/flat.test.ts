import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { diff, type FlatSettings, flatten } from '../../../server/core/settings/flat.ts'
import { settingUnit } from '../../../server/core/settings/words.ts'
import { patch } from '../../helpers/patch.ts'
import { heron } from '../../helpers/skids.ts'

const skid = heron()
const value = fc.oneof(
  fc.double({ noNaN: true, noDefaultInfinity: true }),
  fc.string({ maxLength: 8 }),
  fc.boolean(),
  fc.array(fc.constantFrom('flow', 'sensor', 3)),
)
const flat = fc.dictionary(fc.stringMatching(/^[a-z]{1,2}(\.[a-z]{1,2}){0,2}$/), value, {
  maxKeys: 12,
}) as fc.Arbitrary<FlatSettings>

describe('a configuration as dotted paths', () => {
  it('names what has a name by it: a limit, a range, a feed, an alarm field of the skid heron', () => {
    const f = flatten(skid)
    expect(f['segments.R2.limits.dpHighBar']).toBe(4)
    expect(f['segments.R2.limits.feedRatio.high']).toBe(1.5)
    expect(f['tags.PT-113.quantity']).toBe('pressure')
    expect(f['segments.order']).toEqual(skid.segments.map((s) => s.id))
    expect(f['alarms.fouling:R1.timeToRespondSeconds']).toBe(1200)
    expect(f['segments.R2.limits.flowLow']).toBe(2)
    // Not set is not there.
    expect(Object.values(f)).not.toContain(null)
  })

  // REC-06
  it('the difference of any two, laid over the first, gives the second; of one with itself it is empty', () => {
    fc.assert(
      fc.property(flat, flat, (a, b) => {
        expect(patch(a, diff(a, b))).toEqual(patch(b, []))
        expect(diff(a, a)).toEqual([])
        expect(diff(b, a)).toEqual(diff(a, b).map((c) => ({ path: c.path, old: c.new, new: c.old })))
      }),
    )
  })

  it.each([
    ['segments.R1.limits.dpHighBar', 'bar'],
    ['segments.R1.limits.temperatureHighC', '°C'],
    ['segments.R1.limits.flowLow', 'kg/h'],
    ['segments.R1.limits.feedRatio.low', 'mol/mol'],
    ['streams.A.waterPpm', 'ppm'],
    ['streams.B.reagent.concentrationMolL', 'mol/L'],
    ['detection.falseAlarmDays', 'd'],
    ['detection.riseToFindPct', '%'],
    ['alarms.flow.onDelaySeconds', 's'],
    ['segments.R1.channel.diameterMm', 'mm'],
    ['disturbances.wanderPa', 'Pa'],
    ['disturbances.meterTauH', 'h'],
    ['alarms.flow.priority', null],
    ['suppression.rest.phases', null],
  ])('%s is in %s', (path, unit) => {
    expect(settingUnit(skid, path)).toBe(unit)
  })
})
