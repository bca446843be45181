import { describe, expect, it } from 'vitest'
import { MonitorError } from '../../server/core/errors.ts'
import { reportText } from '../../server/core/pipeline/collect.ts'
import { createEngine } from '../../server/monitor/engine.ts'
import type { Publisher } from '../../server/monitor.ts'
import { heron, shortNight, simulatedBench, tempDir } from './bench.ts'

const minutes = 34

/** Lives to the end in beats of one minute, with acts at fixed minutes; stops and resumes before those named. */
async function lived(stops: readonly { readonly minute: number; readonly cleanly: boolean }[]) {
  const dir = tempDir()
  let b = simulatedBench(dir, shortNight(minutes / 60), { snapshotMs: 7000 })
  for (let minute = 0; minute <= minutes; minute++) {
    const stop = stops.find((x) => x.minute === minute)
    if (stop !== undefined) {
      if (stop.cleanly) await b.monitor.stop()
      b.store.close()
      b = simulatedBench(dir, shortNight(minutes / 60), { snapshotMs: 7000, pair: { run: b.run, stepsRun: b.stepsRun } })
      // The simulator first returns to where it stood.
      while (await b.monitor.beat());
    }
    // An act belongs to the state of the run, not of the process: it stands at the same row whatever was restarted.
    if (minute === 12 && b.store.sequence.acts(b.run).length === 0)
      b.monitor.act(b.run, { kind: 'comment', person: 'A', alarm: null, text: 'seen' })
    b.clock.pass(1000)
    await b.monitor.beat()
  }
  const report = reportText(createEngine({ store: b.store, run: b.run, stepsRun: b.stepsRun, skid: heron }).report())
  const journal = JSON.stringify([b.store.events.list(b.run), b.store.transitions.list(b.run)])
  const steps = JSON.stringify(
    b.store.readings.samples(b.stepsRun, [0, 1, 2, 15, 29, 33], 0, 1e15).map((s) => [[...s.tMs], [...s.values], [...s.codes]]),
  )
  const rows = b.store.sequence.count(b.run).rows
  b.store.close()
  return { report, journal, steps, rows }
}

describe('a restart', () => {
  it('changes nothing: report, journal and steps of a run stopped and crashed four times are those of one that was left alone', async () => {
    const undisturbed = await lived([])
    expect(undisturbed.rows).toBe(2040)
    expect(JSON.parse(undisturbed.report).alarms.length).toBe(1)
    const disturbed = await lived([
      { minute: 3, cleanly: false },
      { minute: 16, cleanly: true },
      { minute: 30, cleanly: false },
      { minute: 33, cleanly: false },
    ])
    expect(disturbed).toEqual(undisturbed)
  })

  it('takes what lies beyond the snapshot from the store: events said again are compared, and none differs', async () => {
    const dir = tempDir()
    const b = simulatedBench(dir, shortNight(2), { snapshotMs: 10_000 })
    for (let i = 0; i < 38; i++) {
      b.clock.pass(1000)
      await b.monitor.beat()
    }
    const before = { events: b.store.events.count(b.run), seq: b.monitor.engine(b.run)!.seq() }
    b.store.close()
    const again = simulatedBench(dir, shortNight(2), { pair: { run: b.run, stepsRun: b.stepsRun } })
    const engine = again.monitor.engine(b.run)!
    expect(engine.seq()).toBe(before.seq)
    again.store.together(() => engine.journal())
    engine.news()
    expect([engine.differing(), again.store.events.count(b.run)]).toEqual([0, before.events])
    again.store.close()
  })
})

describe('the order of truth', () => {
  it('publishes nothing that is not on disk: at every piece of news the store holds its rows, its steps, its alarms and its acts', async () => {
    const b = simulatedBench(tempDir(), shortNight(0.6))
    let told = 0
    const publisher: Publisher = {
      news(run, state, news) {
        told++
        expect(b.store.sequence.span(run)?.toMs ?? null).toBe(state.data.lastRowMs)
        expect(b.store.sequence.count(b.stepsRun).rows).toBeGreaterThanOrEqual(news.steps.length)
        if (news.steps.length > 0) expect(b.store.sequence.span(b.stepsRun)!.toMs).toBe(news.steps.at(-1)!.tMs)
        for (const a of news.alarms)
          expect(b.store.events.list(run).some((e) => e.kind === 'alarm' && JSON.stringify(e.body).includes(`"id":${a.id},`))).toBe(
            true,
          )
        for (const act of news.acts) expect(b.store.sequence.acts(run).map((x) => x.seq)).toContain(act.seq)
      },
      runs: () => undefined,
    }
    b.monitor.publishTo(publisher)
    for (let i = 0; i < 34; i++) {
      b.clock.pass(1000)
      await b.monitor.beat()
      if (i % 10 === 5) b.monitor.act(b.run, { kind: 'comment', person: 'A', alarm: null, text: `minute ${i}` })
    }
    expect(told).toBeGreaterThanOrEqual(37)
    b.store.close()
  })
})

describe('a full disk', () => {
  /** Fails appends with DISK_FULL while `on`. */
  function filling(b: ReturnType<typeof simulatedBench>) {
    const { append } = b.store.sequence
    const state = { on: false }
    Object.assign(b.store.sequence, {
      append: (batch: Parameters<typeof append>[0]) => {
        if (state.on) throw new MonitorError('DISK_FULL', 'no room left', { hint: 'free some space' })
        return append(batch)
      },
    })
    return state
  }

  it('stops the intake and is told; once there is room again every row is there, and the log has said both', async () => {
    const b = simulatedBench(tempDir(), shortNight(0.5))
    const disk = filling(b)
    const beat = async (n: number): Promise<void> => {
      for (let i = 0; i < n; i++) {
        b.clock.pass(1000)
        await b.monitor.beat()
      }
    }
    await beat(5)
    const rows = b.store.sequence.count(b.run).rows
    disk.on = true
    await beat(5)
    expect(b.store.sequence.count(b.run).rows).toBe(rows)
    expect(b.monitor.state(b.run).data.source).toMatchObject({ state: 'failed', message: expect.stringContaining('not recording') })
    expect(() => b.monitor.act(b.run, { kind: 'comment', person: 'A', alarm: null, text: 'lost?' })).toThrow('no room left')
    disk.on = false
    await beat(30)
    expect(b.store.sequence.count(b.run).rows).toBe(1800)
    expect(b.lines.filter((l) => /room left|again/.test(l)).length).toBe(2)
    b.store.close()
  })

  it('gives up after 30 s of it, so that the process can end with the error', async () => {
    const b = simulatedBench(tempDir(), shortNight(0.5))
    const disk = filling(b)
    disk.on = true
    let ended: unknown = null
    for (let i = 0; i < 40 && ended === null; i++) {
      b.clock.pass(1000)
      await b.monitor.beat().catch((error) => {
        ended = error
        expect(i).toBe(30)
      })
    }
    expect(ended).toMatchObject({ code: 'DISK_FULL' })
    b.store.close()
  })
})
