import { describe, expect, it } from 'vitest'
import { eventFault, filterChanged, handEventOf, subjectOf, waterResult } from '../../../server/core/settings/hand-events.ts'
import type { Skid } from '../../../server/core/skid.ts'
import { heron } from '../../helpers/skids.ts'

const skid = heron()
const event = (event: string, value: number | null, unit: string | null, note = '', of?: string) => ({
  event,
  value,
  unit,
  note,
  ...(of === undefined ? {} : { of }),
})

describe('events entered by hand', () => {
  it.each([
    ['Karl Fischer', 180, 'ppm', null],
    ['karl-fischer', 0.018, '%', null],
    ['Karl Fischer', 180, 'mL', 'Karl Fischer needs its unit, one of ppm, mg/kg, %'],
    ['Karl Fischer', 180, null, 'Karl Fischer needs its unit, one of ppm, mg/kg, %'],
    ['Karl Fischer', null, null, 'Karl Fischer needs a value in ppm, mg/kg, %'],
    ['Karl Fischer', -3, 'ppm', 'Karl Fischer of -3 ppm cannot be: at least 0, at most 1000000 ppm'],
    ['Karl Fischer', 120, '%', 'Karl Fischer of 120 % cannot be: at least 0, at most 1000000 ppm'],
    ['titre', 1.6, 'mol/L', null],
    ['titre', 1.6, 'ppm', 'titre needs its unit, one of mol/L, mmol/L'],
    ['drum change', null, null, null],
    ['drum change', 3, 'kg', 'drum change has no value; write it in the note'],
    ['filter change', null, 'ppm', 'a unit without a value'],
    ['effluent test', 6.8, 'pH', null],
    ['pump oiled', 3, 'drops', null],
    ['', null, null, 'an event needs its kind'],
  ])('%s of %s %s: %s', (kind, value, unit, fault) => {
    expect(eventFault(skid, event(kind, value, unit))).toBe(fault)
  })

  it('knows a kind however it is spelt, and the stream or segment it is of by name or by its note, never by guessing', () => {
    expect(['KF', 'karl_fischer', 'Water Content'].map((k) => handEventOf(k)?.kind)).toEqual(Array(3).fill('Karl Fischer'))
    expect(handEventOf('pump oiled')).toBeNull()
    expect(subjectOf(skid, event('Karl Fischer', 180, 'ppm', '', 'A'))).toBe('A')
    expect(subjectOf(skid, event('Karl Fischer', 180, 'ppm', 'drum 7 of feed A'))).toBe('A')
    expect(subjectOf(skid, event('Karl Fischer', 180, 'ppm', 'B'))).toBe('B')
    expect(subjectOf(skid, event('Karl Fischer', 180, 'ppm', 'A drum of the day'))).toBeNull()
    expect(subjectOf(skid, event('Karl Fischer', 180, 'ppm', 'feed A and feed B'))).toBeNull()
    expect(eventFault(skid, event('Karl Fischer', 180, 'ppm', '', 'R1'))).toContain("'R1' is none of this skid")
  })

  it('0.018 % of water by Karl Fischer is 180 ppm by mass; without its stream it tells nothing', () => {
    expect(waterResult(skid, event('Karl Fischer', 0.018, '%', '', 'A'))).toEqual({ stream: 'A', ppm: 180 })
    expect(waterResult(skid, event('Karl Fischer', 0.018, '%'))).toBeNull()
    expect(waterResult(skid, event('titre', 1.6, 'mol/L', '', 'A'))).toBeNull()
  })

  it('a changed filter is a segment of kind filter: named, or the only one there is', () => {
    const filter = { ...skid.segments[0]!, id: 'F1', kind: 'filter' as const }
    const one: Skid = { ...skid, segments: [...skid.segments, filter] }
    expect(filterChanged(one, event('filter change', null, null))).toBe('F1')
    expect(
      filterChanged({ ...one, segments: [...one.segments, { ...filter, id: 'F2' }] }, event('filter change', null, null)),
    ).toBeNull()
    expect(
      filterChanged({ ...one, segments: [...one.segments, { ...filter, id: 'F2' }] }, event('filter change', null, null, '', 'F2')),
    ).toBe('F2')
    expect(filterChanged(one, event('filter change', null, null, '', 'R1'))).toBeNull()
  })
})
