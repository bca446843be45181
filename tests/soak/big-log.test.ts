import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, expect, it } from 'vitest'
import { benchSkid } from '../helpers/cli.ts'
import { pipeLog } from '../helpers/pipe-log.ts'

const dir = mkdtempSync(join(tmpdir(), 'big-log-'))
afterAll(() => rmSync(dir, { recursive: true }))

it('ten times 156 MB piped through with a heap of 128 MB peaks below 300 MB of memory', async () => {
  writeFileSync(join(dir, 'bench.yaml'), benchSkid)
  const started = performance.now()
  const { rows, report, peakMB } = await pipeLog(join(dir, 'bench.yaml'), 10 * 156e6)
  console.log(`1560 MB, ${rows} rows: peak ${peakMB.toFixed(0)} MB, ${((performance.now() - started) / 1000).toFixed(0)} s`)
  expect(report.run.rows).toMatchObject({ total: rows, late: 0 })
  expect(peakMB).toBeLessThan(300)
}, 1_800_000)
