import { expect, it } from 'vitest'
import { simulatedSource } from '../../server/ingest/simulated.ts'
import { createEngine } from '../../server/monitor/engine.ts'
import { heron, newHeronRun, shortNight, simulatedBench, tempDir } from './bench.ts'

it('a run whose analysis fails is told as failed and recorded on; the run beside it goes on, and the recorded readings can be analysed later', async () => {
  const b = simulatedBench(tempDir(), shortNight(0.5))
  const other = newHeronRun(b.store)
  b.monitor.add({
    ...other,
    skid: heron,
    source: simulatedSource({ skid: heron, scenario: shortNight(0.5), speed: 60, steadyMs: b.clock.now, state: null }),
  })
  const beat = async (n: number): Promise<void> => {
    for (let i = 0; i < n; i++) {
      b.clock.pass(1000)
      await b.monitor.beat()
    }
  }
  await beat(5)
  Object.assign(b.monitor.engine(b.run)!, {
    push: () => {
      throw new RangeError('a mistake of ours')
    },
  })
  await beat(5)
  expect(b.monitor.state(b.run).data.source).toEqual({
    state: 'failed',
    message: 'the analysis failed after entry 300; readings are still recorded',
  })
  expect(b.lines.filter((l) => l.includes('a mistake of ours')).length).toBe(1)
  expect([b.run, other.run].map((r) => b.store.sequence.count(r).rows)).toEqual([600, 600])
  expect(b.monitor.state(other.run).data.source.state).toBe('running')
  expect(b.monitor.engine(other.run)!.seq()).toBe(600)
  await b.monitor.stop()
  const later = createEngine({ store: b.store, run: b.run, stepsRun: b.stepsRun, skid: heron })
  expect([later.seq(), later.pipeline.view().grid.rows]).toEqual([600, 600])
  b.store.close()
})
