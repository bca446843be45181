import { readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, expect, it } from 'vitest'
import { analyseLog, fileSource } from '../../server/analyse.ts'
import type { Report } from '../../server/core/report.ts'
import type { RunRow } from '../../server/wire/index.ts'
import { heron, heronFile, tempDir } from '../monitor/bench.ts'
import { bundled, dropBundles, start } from './children.ts'

afterAll(dropBundles)
const rows = 2400

it('follows a log that another process writes and rotates, through a kill and a clean stop: every row once, the alarms those of analyse', async () => {
  const dir = tempDir()
  const log = join(dir, 'log.csv')
  const data = join(dir, 'data')
  const server = bundled('tests/e2e-server/serving-child.ts')
  const writer = start(bundled('tests/e2e-server/writer.ts'), [log, heronFile, String(rows), '1300'])
  const serve = async () => {
    const child = start(server, [data, heronFile, '0', log])
    const [, port] = await child.line(/^listening (\d+)/)
    return { child, url: `http://127.0.0.1:${port}/api/runs/1` }
  }
  const rowsNow = async (url: string): Promise<number> => ((await (await fetch(url)).json()) as RunRow).rows
  const until = async (url: string, n: number): Promise<void> => {
    while ((await rowsNow(url)) < n) await new Promise((done) => setTimeout(done, 30))
  }
  let s = await serve()
  await until(s.url, 400)
  s.child.process.kill('SIGKILL')
  await s.child.ended
  s = await serve()
  await until(s.url, 1200)
  s.child.process.kill('SIGTERM')
  expect(await s.child.ended).toBe(0)
  await writer.line(/written/)
  s = await serve()
  await until(s.url, rows)
  await new Promise((done) => setTimeout(done, 200))
  const report = (await (await fetch(`${s.url}/report`)).json()) as Report
  const row = (await (await fetch(s.url)).json()) as RunRow
  s.child.process.kill('SIGTERM')
  expect(await s.child.ended).toBe(0)
  expect(s.child.err).toEqual([])
  expect([row.rows, row.kind, row.state]).toEqual([rows, 'followed', 'live'])
  expect(report.run.rows).toEqual({ total: rows, late: 0, repeated: 0, outOfOrder: 0, badTime: 0 })

  const whole = join(dir, 'whole.csv')
  const [first, second] = [`${log}.1`, log].map((f) => readFileSync(f, 'utf8'))
  writeFileSync(whole, first! + second!.slice(second!.indexOf('\n') + 1))
  const analysed = (await analyseLog({ skid: heron, sources: [fileSource(whole)] })).report
  expect(analysed.alarms.length).toBe(1)
  // Only a store numbers the settings: version 1 is the skid file as the server was started with it, 0 a file that no store knows.
  expect([report, analysed].map((r) => r.alarms.map((a) => a.configuration))).toEqual([[1], [0]])
  const same = (r: Report) => r.alarms.map(({ cleared: _, configuration: __, ...a }) => a)
  expect(same(report)).toEqual(same(analysed))
  expect(report.run.tags).toEqual(analysed.run.tags)
})
