import { describe, expect, it } from 'vitest'
import { readSettings } from '../../server/cli/settings-file.ts'
import { heron } from '../helpers/skids.ts'

const skid = heron()
const line = (text: string): string => {
  try {
    readSettings(skid, text, 's.yaml')
  } catch (error) {
    return (error as { line(): string }).line()
  }
  throw new Error('expected a refusal')
}

describe('settings laid over a skid', () => {
  it('change the limits and the promise they name and leave every other as it was', () => {
    const { skid: s } = readSettings(
      skid,
      'detection: { riseToFindPct: 8 }\nlimits: { R1: { dpHighBar: 5.5, dpHighHighBar: null } }\n',
      's.yaml',
    )
    expect(s.detection).toEqual({ falseAlarmDays: 30, riseToFindPct: 8 })
    const [before, after] = [skid, s].map((x) => x.segments.find((g) => g.id === 'R1')!.limits)
    expect(after).toEqual({ ...before, dpHighBar: 5.5, dpHighHighBar: null })
    expect(s.segments.filter((g) => g.id !== 'R1')).toEqual(skid.segments.filter((g) => g.id !== 'R1'))
  })

  it('may be JSON, and may change nothing', () => {
    expect(readSettings(skid, '{"limits": {"Q1": {"flowLow": 3}}}', 's.json').skid.segments.at(-1)!.limits.flowLow).toBe(3)
    expect(readSettings(skid, '{}', 's.json')).toEqual({ skid, acts: [] })
  })

  // REC-06
  it('may change any setting from a time of the log on; each such version becomes an act, soonest first, with what it changes', () => {
    const text = `versions:
  - { from: 2031-05-05T21:00:00Z, reason: back again, changes: { segments.R1.limits.dpHighBar: 6 } }
  - from: 2031-05-05 22:30
    reason: weaker gasket
    person: R. Tamsin
    changes: { segments.R1.limits.dpHighBar: 5, alarms.dp-limit.priority: high, suppression.rest.alarms: [flow], suppression.rest.phases: [hold] }
`
    const { acts } = readSettings(skid, text, 's.yaml')
    const at = (iso: string) => Date.parse(iso)
    expect(acts.map((a) => a.kind === 'settings' && [a.version, a.effectiveMs, a.person, a.changes.map((c) => [c.old, c.new])])).toEqual([
      [1, at('2031-05-05T20:30:00Z'), 'R. Tamsin', [[6, 5], [null, 'high'], [null, ['flow']], [null, ['hold']]]],
      [2, at('2031-05-05T21:00:00Z'), '', [[5, 6]]],
    ]) // biome-ignore format: a list
  })

  it.each([
    ['a version at no time', 'versions:\n  - { from: noon, reason: why, changes: { detection.riseToFindPct: 4 } }\n', /^s\.yaml:2:13: from is 'noon'; expected a time/],
    ['a version without a reason', 'versions:\n  - { from: 2031-05-05T21:00:00Z, changes: { detection.riseToFindPct: 4 } }\n', /'reason'/],
    ['a version of a tag', 'versions:\n  - { from: 2031-05-05T21:00:00Z, reason: why, changes: { tags.PT-101.column: x } }\n', /^s\.yaml:2:\d+: tags\.PT-101\.column: cannot change within a run/],
    ['a version of a group', 'versions:\n  - { from: 2031-05-05T21:00:00Z, reason: why, changes: { detection: {} } }\n', /a setting that is no value/],
    ['nothing', '', /^s\.yaml:1:1: the file is empty; expected /],
    ['a list', '- 1\n', /^s\.yaml:1:1: the file is a list; expected a group with keys detection, limits/],
    ['an unknown key', 'limit: {}\n', /^s\.yaml:1:1: unknown key 'limit'; .*did you mean 'limits'\?/],
    ['a segment that is not there', 'limits:\n  R9: { dpHighBar: 5 }\n', /^s\.yaml:2:3: unknown key 'R9' in limits; expected a segment \(PA, PB, R1/],
    ['a limit that is not there', 'limits:\n  R1: { dpHigh: 5 }\n', /^s\.yaml:2:9: unknown key 'dpHigh' in R1; .*did you mean 'dpHighBar'\?/],
    ['a text for a number', 'limits: { R1: { dpHighBar: 5 bar } }\n', /^s\.yaml:1:28: dpHighBar is the text '5 bar'; .*the number alone \(5\)/],
    ['a limit below nothing', 'limits: { R1: { dpHighBar: -5 } }\n', /^s\.yaml:1:28: dpHighBar is -5; expected a number above 0/],
    ['a promise of no days', 'detection: { falseAlarmDays: 0 }\n', /^s\.yaml:1:30: falseAlarmDays is 0; expected a number above 0/],
    ['a key given twice', 'limits: {}\nlimits: {}\n', /^s\.yaml:2:1: 'limits' stands twice/],
    ['two mistakes', 'a: 1\nb: 2\n', /^s\.yaml:1:1: unknown key 'a'; .*\(and 1 more mistake\)/],
    ['an alias bomb', `a: &a [x]\n${Array.from('bcdefghij', (n, i) => `${n}: &${n} [${Array(10).fill(`*${'abcdefghi'[i]}`).join(', ')}]`).join('\n')}\n`, /aliases unfold to too many values/],
    ['100 000 open brackets, which would overflow the stack of a recursive reader', '['.repeat(100_000), /^s\.yaml:1:\d+: nested more than 60 levels deep/],
  ] as const)('refuse %s on one line with its place', (_, text, message) => {
    expect(line(text)).toMatch(message)
    expect(line(text)).not.toContain('\n')
  }) // biome-ignore format: a table
})
