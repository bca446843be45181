import { readFileSync } from 'node:fs'
import { expect, it } from 'vitest'
import { createPipeline } from '../../server/core/pipeline/pipeline.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { openStore } from '../../server/store/open.ts'
import type { ActRow, RunRow } from '../../server/wire/index.ts'
import { serveQuietly } from '../helpers/serve-quietly.ts'
import { fixture } from '../helpers/skids.ts'
import { tempDir } from '../monitor/bench.ts'

const text = readFileSync(fixture('skids/heron.yaml'), 'utf8')
const skid = loadSkid(text, 'heron.yaml')
const known = [{ segment: 'R1', zeroPa: 1200, flowExponent: { over: 0.1, sd: 0.02 } }]

it('serve --baseline: a new run begins with the step test as an act, before its first row; a run taken up again has it once', async () => {
  const dir = tempDir()
  const begin = async (visit: (acts: ActRow[]) => void) => {
    const store = openStore(dir, { synchronous: 'NORMAL' })
    const serving = await serveQuietly(store, [
      {
        skid,
        file: 'heron.yaml',
        text,
        commissioned: { file: 'records/heron.json', known },
        source: { kind: 'simulated', speed: 60 },
      },
    ])
    try {
      const get = async <T>(what: string): Promise<T> => (await (await fetch(new URL(what, serving.url))).json()) as T
      const { run } = (await get<RunRow[]>('/api/runs')).find((r) => r.state === 'live')!
      visit(await get<ActRow[]>(`/api/runs/${run}/acts`))
    } finally {
      await serving.stop()
      store.close()
    }
  }
  const told = (acts: ActRow[]) => acts.filter(({ act }) => act.kind === 'commissioned')
  for (let start = 0; start < 2; start++)
    await begin((acts) => {
      expect(told(acts).map(({ act }) => act)).toMatchObject([{ kind: 'commissioned', reason: 'step test heron.json', known }])
      expect(acts.every(({ act }) => act.kind === 'commissioned' || act.kind === 'settings')).toBe(true)
    })
})

it('a step test that comes after the first reading is kept and said to be too late', () => {
  const pipeline = createPipeline(skid)
  const act = { kind: 'commissioned' as const, tMs: 1000, person: 'engineer', reason: 'step test', known }
  const notes = () =>
    pipeline.push({ kind: 'act', act }).filter((e) => e.kind === 'note').map((e) => (e.kind === 'note' ? e.text : '')) // biome-ignore format: one line
  expect(notes()).toEqual([])
  expect(pipeline.save().watch.bank!.known!.map((k) => k?.zeroChecked)).toEqual(skid.segments.map((g) => g.id === 'R1'))
  const width = skid.tags.length + 1
  const values = new Float64Array(2 * width)
  pipeline.push({
    kind: 'rows',
    block: { rows: 2, width, tMs: Float64Array.of(0, 20_000), values, codes: new Uint8Array(2 * width) },
  })
  expect(notes()).toEqual(['step test kept, not used: the run had begun'])
})
