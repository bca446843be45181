import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { expect, it } from 'vitest'
import type { Report } from '../../server/core/report.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { openStore } from '../../server/store/open.ts'
import type { ActRow, RunRow, SettingsPage } from '../../server/wire/index.ts'
import { serveQuietly } from '../helpers/serve-quietly.ts'
import { fixture } from '../helpers/skids.ts'
import { tempDir } from '../monitor/bench.ts'

const text = readFileSync(fixture('skids/heron.yaml'), 'utf8')

/** A server on the simulated heron with this skid file, as `serve` starts it; `visit` while it runs. */
async function serve(dir: string, skidText: string, visit: (url: string) => Promise<void>) {
  const store = openStore(dir, { synchronous: 'NORMAL' })
  const serving = await serveQuietly(store, [
    { skid: loadSkid(skidText, 'heron.yaml'), file: 'heron.yaml', text: skidText, source: { kind: 'simulated', speed: 60 } },
  ])
  try {
    await visit(serving.url)
  } finally {
    await serving.stop()
    store.close()
  }
}

// REC-06
it('begins each run with the versions in force: after a restart the run goes on, a file changed on disk is a version of its own and begins a new run with it', async () => {
  const dir = join(tempDir(), 'store')
  const path = 'segments.R1.limits.dpHighBar'
  const get = async <T>(url: string, what: string): Promise<T> => (await (await fetch(new URL(what, url))).json()) as T
  const live = async (url: string) => (await get<RunRow[]>(url, '/api/runs')).find((r) => r.state === 'live')!.run
  const page = (url: string) => get<SettingsPage>(url, '/api/skids/heron/settings')
  const settings = async (url: string, run: number) =>
    (await get<ActRow[]>(url, `/api/runs/${run}/acts`)).flatMap(({ act: a }) => (a.kind === 'settings' ? [[a.version, a.person, a.changes.map((c) => c.new)]] : [])) // biome-ignore format: a list
  const versionsOf = async (url: string, run: number) =>
    (await get<Report>(url, `/api/runs/${run}/report`)).run.configuration.map((c) => [c.version, c.from === null])

  const acts = (run: number) => `/api/runs/${run}/acts`
  const post = async (url: string, what: string, body: object) => {
    const headers = { 'content-type': 'application/json' }
    expect((await fetch(new URL(what, url), { method: 'POST', headers, body: JSON.stringify(body) })).status).toBe(200)
  }

  let first = 0
  await serve(dir, text, async (url) => {
    first = await live(url)
    expect(await settings(url, first)).toEqual([[1, 'file', []]])
    const sent = { reason: 'weaker gasket', effectiveMs: null, changes: [{ path, new: 5.5 }] }
    const reply = await fetch(new URL('/api/skids/heron/settings', url), { method: 'POST', headers: { 'content-type': 'application/json' }, body: JSON.stringify(sent) }) // biome-ignore format: a list
    expect(reply.status).toBe(200)
    expect(await versionsOf(url, first)).toContainEqual([1, true])
    const entry = { kind: 'event', unit: null, note: '', value: null }
    for (const of of ['A', 'C'])
      await post(url, acts(first), { ...entry, event: 'Karl Fischer', value: 140, unit: 'ppm', note: 'drum 7', of })
    await post(url, acts(first), { ...entry, event: 'drum change', of: 'C' })
  })
  await serve(dir, text, async (url) => {
    expect(await live(url)).toBe(first)
    expect((await page(url)).versions.map((v) => [v.version, v.kind, v.reason])).toEqual([
      [1, 'file', 'skid file as first loaded'],
      [2, 'change', 'weaker gasket'],
    ])
    expect((await versionsOf(url, first)).map(([v]) => v)).toEqual([1, 2, null, null])
  })
  const edited = text.replace('title: reactor 1', 'title: reactor one')
  expect(edited).not.toBe(text)
  await serve(dir, edited, async (url) => {
    const run = await live(url)
    expect(run).not.toBe(first)
    expect(await settings(url, run)).toEqual([[3, 'file', []]])
    const { version, versions, settings: open } = await page(url)
    expect([version, versions.at(-1)!.reason, versions.at(-1)!.person]).toEqual([3, 'file changed on disk', 'file'])
    // The file counts whole: it does not hold what was changed on the page, and says so.
    expect(versions.at(-1)!.changes.map((c) => [c.path, c.old, c.new])).toEqual([
      [path, 5.5, 6],
      ['segments.R1.title', expect.stringContaining('reactor 1'), expect.stringContaining('reactor one')],
    ])
    expect(open.find((s) => s.path === path)!.value).toBe(6)
    // The water of feed A holds on; that of C went with its drum.
    const entries = (await get<ActRow[]>(url, acts(run))).flatMap(({ act: a }) =>
      a.kind === 'event' ? [[a.of, a.value, a.note]] : [],
    )
    expect(entries).toEqual([['A', 140, `drum 7 (carried over from run ${first})`]])
    expect(open.find((s) => s.path === 'streams.A.waterPpm')!.value).toBe(140)
  })
})
