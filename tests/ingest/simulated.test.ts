import { expect, it } from 'vitest'
import { demoScenario } from '../../server/core/sim/demo.ts'
import type { Asked } from '../../server/core/sim/operator.ts'
import { type SimulatedOptions, simulatedSource } from '../../server/ingest/simulated.ts'
import { heron } from '../core/flush/heron.ts'

const scenario = demoScenario(heron)
const asked = (does: string, minute: number): Asked => ({
  flush: 1, askedMs: scenario.fromMs + minute * 60_000, does, path: ['PA', 'PB', 'R1', 'PC', 'R2'], solvent: 'tetrahydrofuran', flowMlMin: 140, volumeMl: 360,
}) // biome-ignore format: a list

/** Polls until so many rows came; the values of each, and the state that was kept with the last. */
async function take(source: ReturnType<typeof simulatedSource>, rows: number) {
  const out: number[][] = []
  let state: SimulatedOptions['state'] = null
  while (out.length < rows) {
    const p = await source.poll()
    for (const e of p.entries)
      if (e.kind === 'rows')
        for (let r = 0; r < e.block.rows; r++) out.push([...e.block.values.subarray(r * e.block.width, (r + 1) * e.block.width)])
    state = p.state ?? state
  }
  return { out, state }
}
/** A clock that moves on by 100 s at each look: 100 rows of a demo in real time. */
function source(state: SimulatedOptions['state']) {
  let now = 0
  return simulatedSource({
    skid: heron,
    scenario,
    speed: 1,
    steadyMs: () => (now += 100_000),
    state: JSON.parse(JSON.stringify(state)),
  })
}

it('keeps what its operator was told in its state: stopped within F1 and begun again, it goes on with the same rows; what it knows is told in vain', async () => {
  const whole = source(null)
  await take(whole, 1000)
  whole.follow!([asked('F0', 10)])
  const first = await take(whole, 300)
  whole.follow!([asked('F0', 10), asked('F1', 12)])
  const second = await take(whole, 300)
  const rest = await take(whole, 500)
  const again = source(second.state)
  again.follow!([asked('F0', 10), asked('F1', 12)])
  const resumed = await take(again, 500)
  expect(first.out.at(-1)![0]).toBeLessThan(0.1)
  expect(second.out.at(-1)![0]).toBeGreaterThan(1)
  const n = Math.min(rest.out.length, resumed.out.length)
  expect(resumed.out.slice(0, n)).toEqual(rest.out.slice(0, n))
})
