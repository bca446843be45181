import { describe, expect, it } from 'vitest'
import type { Trail } from '../../server/wire/index.ts'
import { zoneClock } from '../../web/model/clock.ts'
import { changeText, summaryText, trailQuery, whatText } from '../../web/model/trail.ts'

const trail: Trail = {
  run: 1, rows: [], total: 0, from: 0, fresh: 0, people: [], review: null, counts: { run: 3, site: 2 }, head: '', signing: { fingerprint: null, trouble: null },
} // biome-ignore format: a fixture

describe('texts of the trail', () => {
  it('tell old and new, and a value taken away', () => {
    expect([changeText({ old: '6', new: '5.5' }), changeText({ old: '6', new: null }), changeText({ old: null, new: '7' }), changeText({ old: null, new: null })]).toEqual(['6 → 5.5', '6 → none', '7', '']) // biome-ignore format: a table
    expect([whatText({ what: 'sign-in.refused' }), whatText({ what: 'person.disable' })]).toEqual([
      'sign-in refused',
      'person disable',
    ])
  })
  it('tell how much is shown and what came since whose review', () => {
    const clock = zoneClock('UTC')
    expect(summaryText(trail, clock)).toBe('Nothing passes the filter; nobody has reviewed it yet.')
    const review = { person: 'Ada Quill', atMs: Date.UTC(2031, 0, 14, 3, 12), remark: 'as it should be', counts: trail.counts }
    const rows = [{}, {}] as unknown as Trail['rows']
    expect(summaryText({ ...trail, rows, total: 9, from: 4, fresh: 2, review }, clock)).toBe(
      '5 to 6 of 9, oldest first; 2 new since Ada Quill reviewed it on 14 Jan 2031 03:12:00 (“as it should be”).',
    )
  })
  it('ask for what is chosen and nothing else', () => {
    const ask = {
      groups: new Set(['act', 'change'] as const),
      person: '',
      onlyNew: false,
      fromMs: null,
      toMs: null,
      from: 0,
      limit: 100,
    }
    expect(trailQuery(ask)).toBe('from=0&limit=100&groups=act%2Cchange')
    expect(trailQuery({ ...ask, person: 'Ruth Alder', onlyNew: true, fromMs: 5, toMs: 9 })).toBe(
      'from=0&limit=100&groups=act%2Cchange&person=Ruth+Alder&onlyNew=true&fromMs=5&toMs=9',
    )
  })
})
