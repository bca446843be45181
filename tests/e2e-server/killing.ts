import { expect } from 'vitest'
import { createCollector, reportText } from '../../server/core/pipeline/collect.ts'
import { createPipeline } from '../../server/core/pipeline/pipeline.ts'
import { cell, phases } from '../../server/core/reading.ts'
import { demoScenario } from '../../server/core/sim/demo.ts'
import { decimalsOf } from '../../server/core/sim/instruments.ts'
import { createSimulator } from '../../server/core/sim/simulator.ts'
import { createEngine } from '../../server/monitor/engine.ts'
import { stepsTitle } from '../../server/monitor/step-log.ts'
import type { RunId } from '../../server/store/keys.ts'
import { openStore, type Store } from '../../server/store/open.ts'
import { heron, heronFile } from '../monitor/bench.ts'
import { type Child, start } from './children.ts'

/** Numbers in [0, 1) from a seed. */
function seeded(seed: number): () => number {
  let s = seed >>> 0
  return () => {
    s = (Math.imul(s, 1_664_525) + 1_013_904_223) >>> 0
    return s / 2 ** 32
  }
}

/** What a client was told: acts that came back with 200, and the newest row it was shown. */
interface Told {
  readonly acts: { seq: number; text: string }[]
  shownMs: number
}

/** Acts and looks without pause until the server is gone. */
async function use(port: number, told: Told): Promise<void> {
  const base = `http://127.0.0.1:${port}/api/runs/1`
  for (let i = 0; ; i++) {
    const text = `act ${told.acts.length}-${i}`
    try {
      const reply = await fetch(`${base}/acts`, {
        method: 'POST',
        headers: { 'content-type': 'application/json' },
        body: JSON.stringify({ kind: 'comment', alarm: null, text }),
      })
      if (reply.ok) told.acts.push({ seq: ((await reply.json()) as { seq: number }).seq, text })
      const row = (await (await fetch(base)).json()) as { toMs: number | null }
      told.shownMs = Math.max(told.shownMs, row.toMs ?? 0)
    } catch {
      return
    }
    await new Promise((done) => setTimeout(done, 10))
  }
}

/** Lets it serve until so many more acts were acknowledged and minutes of the run shown, then kills it `afterMs` later. */
async function round(
  server: string,
  data: string,
  told: Told,
  more: { acts: number; minutes: number; afterMs: number },
): Promise<void> {
  const child: Child = start(server, [data, heronFile, '400'])
  const [, port] = await child.line(/^listening (\d+)/)
  const acts = told.acts.length + more.acts
  const shownMs = Math.max(told.shownMs, demoScenario(heron).fromMs) + more.minutes * 60_000
  const using = use(Number(port), told)
  while (told.acts.length < acts || told.shownMs < shownMs) await new Promise((done) => setTimeout(done, 2))
  await new Promise((done) => setTimeout(done, more.afterMs))
  child.process.kill('SIGKILL')
  expect(await child.ended).toBe('SIGKILL')
  expect(child.err).toEqual([])
  await using
}

/** Every row of the store is the simulator's, in its order, none missing and none twice. Gives their number. */
function holdsRows(store: Store, run: RunId): number {
  const simulator = createSimulator(heron, demoScenario(heron))
  const decimals = heron.tags.map(decimalsOf)
  let rows = 0
  for (const { entry } of store.sequence.read(run)) {
    if (entry.kind !== 'rows') continue
    const { block: b } = entry
    for (let r = 0; r < b.rows; r++) {
      const row = simulator.next()
      const values = row.values.map((v, i) => (v === null ? null : Number(v.toFixed(decimals[i]))))
      const got = values.map((_, i) => (b.codes[r * b.width + i] === cell.value ? b.values[r * b.width + i]! : null))
      if (b.tMs[r] !== row.tMs || got.some((v, i) => v !== values[i]) || phases[b.values[r * b.width + b.width - 1]!] !== row.phase)
        expect({ row: rows, tMs: b.tMs[r], got }).toEqual({ row: rows, tMs: row.tMs, got: values })
      rows++
    }
  }
  return rows
}

/**
 * Kills a serving process `times` times at seeded moments while it ingests the demo 400 times faster than time and a client acts on it.
 * Then: every acknowledged act and every row that was shown is there; no row is missing or doubled; the report, resumed over all those
 * kills, is that of one undisturbed pass over the sequence, and so is the journal of events and alarms; the chains verify, and hold each
 * act and each alarm record once.
 */
export async function killRounds(server: string, data: string, times: number, seed: number) {
  const next = seeded(seed)
  const told: Told = { acts: [], shownMs: 0 }
  for (let i = 0; i < times; i++)
    await round(server, data, told, { acts: 2 + Math.floor(6 * next()), minutes: 6 * next(), afterMs: 80 * next() })
  const store = openStore(data, { keys: process.env['CLEARBORE_KEYS'] ?? '' })
  try {
    const run = 1 as RunId
    expect(store.check()).toEqual([])
    const acts = new Map(store.sequence.acts(run).map(({ seq, act }) => [seq, act]))
    for (const { seq, text } of told.acts) expect(acts.get(seq)).toMatchObject({ kind: 'comment', text })
    const { faults, signed } = store.trail.verify()
    expect([faults, signed === null]).toEqual([[], false])
    const chained = new Map(store.trail.ofRun(run).flatMap(({ record: r }) => (r.kind === 'act' ? [[r.seq, r.act]] : [])))
    expect(chained).toEqual(acts)
    const journal = store.trail.ofRun(run).flatMap(({ record: r }) => (r.kind === 'transition' ? [r.transition] : []))
    expect(journal).toEqual(store.transitions.list(run).map((t) => t.more))
    expect(store.sequence.span(run)!.toMs).toBeGreaterThanOrEqual(told.shownMs)
    const rows = holdsRows(store, run)
    expect(store.sequence.count(run).rows).toBe(rows)

    const stepsRun = store.runs.list().find((r) => r.source === stepsTitle(run))!.id
    const engine = createEngine({ store, run, stepsRun, skid: heron })
    store.together(() => engine.journal())
    expect(engine.differing()).toBe(0)
    const pipeline = createPipeline(heron)
    const collector = createCollector(heron)
    for (const { entry } of store.sequence.read(run)) collector.take(pipeline.push(entry))
    expect(reportText(engine.report())).toBe(reportText(collector.report(pipeline)))
    return { rows, acts: told.acts.length, unacknowledged: acts.size - told.acts.length }
  } finally {
    store.close()
  }
}
