import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { expect, it } from 'vitest'
import { createConfiguration } from '../../server/core/settings/configuration.ts'
import { diff, flatten } from '../../server/core/settings/flat.ts'
import { comparison, settingsPage } from '../../server/settings/page.ts'
import { createVersions } from '../../server/settings/versions.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { openStore } from '../../server/store/open.ts'
import { patch } from '../helpers/patch.ts'
import { fixture } from '../helpers/skids.ts'
import { newHeronRun, tempDir } from '../monitor/bench.ts'

const text = readFileSync(fixture('skids/heron.yaml'), 'utf8')
const skid = loadSkid(text, 'heron.yaml')
const person = 'R. Tamsin'
const reason = 'trial of other settings'
const limit = (old: number, now: number) => [{ path: 'segments.R1.limits.dpHighBar', old, new: now }]

// REC-06
it('numbers the file, changes and the changed file 1, 2, 3 …; any two are compared with unit, old, new and added tags; a file counts whole', () => {
  const store = openStore(join(tempDir(), 's'), { synchronous: 'NORMAL' })
  const versions = createVersions(store, loadSkid)
  const { run } = newHeronRun(store)
  const file = { name: 'heron.yaml', text }
  versions.loaded(skid, file, 1000)
  versions.loaded(skid, file, 1500)
  expect(versions.decided('heron', { decidedMs: 2000, effectiveMs: 2000, person, reason, run, changes: limit(6, 5.5) })).toBe(2)
  expect(versions.decided('heron', { decidedMs: 2100, effectiveMs: 9000, person, reason, run, changes: limit(5.5, 5) })).toBe(3)
  expect(versions.decided('heron', { decidedMs: 2200, effectiveMs: 2200, person, reason, run, changes: [{ path: 'streams.A.waterPpm', old: skid.streams[0]!.waterPpm, new: 190 }] })).toBe(4) // biome-ignore format: a list
  const edited = text.replace('tags:\n', 'tags:\n  - { tag: AT-9, quantity: oxygen, unit: "%", range: [0, 25] }\n')
  versions.loaded(loadSkid(edited, 'heron.yaml'), { name: 'heron.yaml', text: edited }, 9900)

  expect(versions.list('heron').map((v) => [v.version, v.kind, v.person, v.reason])).toEqual([
    [1, 'file', 'file', 'skid file as first loaded'],
    [2, 'change', person, reason],
    [3, 'change', person, reason],
    [4, 'change', person, reason],
    [5, 'file', 'file', 'file changed on disk'],
  ])
  expect(comparison(versions, 'heron', 1, 2)).toEqual({
    from: 1,
    to: 2,
    added: [],
    removed: [],
    changes: [{ path: 'segments.R1.limits.dpHighBar', unit: 'bar', old: 6, new: 5.5 }],
  })
  // Version 4 took effect before version 3, which was planned for later.
  expect(comparison(versions, 'heron', 3, 4).changes).toEqual([
    { path: 'segments.R1.limits.dpHighBar', unit: 'bar', old: 5, new: 5.5 },
  ])
  const toFile = comparison(versions, 'heron', 3, 5)
  expect(toFile.added).toEqual(['tag AT-9'])
  expect(comparison(versions, 'heron', 5, 3).removed).toEqual(['tag AT-9'])
  expect(toFile.changes).toContainEqual({ path: 'segments.R1.limits.dpHighBar', unit: 'bar', old: 5, new: 6 })
  for (const a of [1, 2, 3, 4, 5])
    for (const b of [1, 2, 3, 4, 5]) {
      const [from, to] = [versions.flat('heron', a), versions.flat('heron', b)]
      expect(patch(from, diff(from, to))).toEqual(to)
      expect(comparison(versions, 'heron', a, b).changes).toHaveLength(diff(from, to).length)
    }
  expect(() => versions.at('heron', 6)).toThrow('has no version 6')
  store.close()
})

it('a new run begins with the version of its file and each later change: what has taken effect at once, what is planned at its time', () => {
  const store = openStore(join(tempDir(), 's'), { synchronous: 'NORMAL' })
  const versions = createVersions(store, loadSkid)
  const { run } = newHeronRun(store)
  versions.loaded(skid, { name: 'heron.yaml', text }, 1000)
  const decide = (decidedMs: number, effectiveMs: number, old: number, now: number) =>
    versions.decided('heron', { decidedMs, effectiveMs, person, reason, run, changes: limit(old, now) })
  decide(2000, 2000, 6, 5.5)
  decide(2100, 90_000, 5.5, 5)
  decide(2200, 30_000, 5.5, 5.2)
  // The run went on to 40 s: version 4 took effect there, version 3 did not.
  store.sequence.append([{ run, entries: [{ kind: 'tick', tMs: 40_000 }] }])
  const block = { rows: 1, width: 2, tMs: new Float64Array([40_000]), values: new Float64Array(2), codes: new Uint8Array(2) }
  store.sequence.append([{ run, entries: [{ kind: 'rows', block }] }])
  const acts = versions.opening('heron', 50_000)
  expect(acts.map((a) => a.kind === 'settings' && [a.version, a.effectiveMs, a.changes.map((c) => c.new), a.person])).toEqual([
    [1, 50_000, [], 'file'],
    [2, 50_000, [5.5], person],
    [4, 50_000, [5.2], person],
    [3, 90_000, [5], person],
  ])
  const c = createConfiguration(skid)
  for (const a of acts) if (a.kind === 'settings') c.take(a, -1)
  expect([c.version(), c.state.planned.map((p) => p.version)]).toEqual([4, [3]])
  expect(flatten(c.skid())).toEqual({ ...flatten(skid), 'segments.R1.limits.dpHighBar': 5.2 })
  const page = settingsPage(versions, 'heron', null, skid)
  expect([page.run, page.version, page.versions.filter((v) => v.planned).map((v) => v.version)]).toEqual([null, 4, [3]])
  expect(page.settings.find((s) => s.path === 'segments.R1.limits.dpHighBar')).toEqual({
    path: 'segments.R1.limits.dpHighBar', unit: 'bar', value: 5.2, group: 'Limits of R1', name: 'pressure drop, high',
  }) // biome-ignore format: a list
  expect(versions.opening('wren', 0)).toEqual([])
  store.close()
})
