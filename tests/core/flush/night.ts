import { createCollector } from '../../../server/core/pipeline/collect.ts'
import { createPipeline, type Pipeline, type PipelineState } from '../../../server/core/pipeline/pipeline.ts'
import { cell, phases, type RowBlock, rowBlock } from '../../../server/core/reading.ts'
import type { Act, Entry } from '../../../server/core/sequence.ts'
import { demoScenario } from '../../../server/core/sim/demo.ts'
import { decimalsOf } from '../../../server/core/sim/instruments.ts'
import { askedBy, type Order } from '../../../server/core/sim/operator.ts'
import { createSimulator } from '../../../server/core/sim/simulator.ts'
import type { Skid } from '../../../server/core/skid.ts'

type Body = { [K in Act['kind']]: Omit<Extract<Act, { kind: K }>, 'tMs' | 'person'> }[Act['kind']]

/** The demo's night with its simulated operator, row by row through a pipeline; every entry is kept, so that it can be replayed. */
export function night(skid: Skid, over: Parameters<typeof demoScenario>[1] = {}, change?: (row: number, block: RowBlock) => void) {
  const scenario = demoScenario(skid, over)
  const orders: Order[] = []
  const simulator = createSimulator(skid, scenario, orders)
  const decimals = skid.tags.map(decimalsOf)
  const width = skid.tags.length + 1
  let pipeline: Pipeline = createPipeline(skid)
  const collector = createCollector(skid)
  const entries: Entry[] = []
  let rows = 0
  let nowMs = scenario.fromMs

  function push(entry: Entry): void {
    entries.push(entry)
    collector.take(pipeline.push(entry))
  }
  function follow(): void {
    const flush = pipeline.view().flush
    if (flush === null) return
    for (const a of askedBy(flush.course))
      if (!orders.some((o) => o.flush === a.flush && o.does === a.does && o.askedMs === a.askedMs))
        orders.push({ ...a, atMs: Math.max(a.askedMs, nowMs) })
  }
  return {
    entries,
    orders,
    pipeline: () => pipeline,
    report: () => collector.report(pipeline),
    nowMs: () => nowMs,
    course: () => pipeline.view().flush?.course ?? null,
    /** Saves to text and goes on from it. */
    restart(): void {
      pipeline = createPipeline(skid, JSON.parse(JSON.stringify(pipeline.save())) as PipelineState)
    },
    run(minutes: number): void {
      const block = rowBlock(Math.round((60 * minutes) / scenario.logSeconds), width)
      for (; block.rows < block.tMs.length; block.rows++) {
        const row = simulator.next()
        const r = block.rows
        block.tMs[r] = row.tMs
        row.values.forEach((v, i) => {
          block.values[r * width + i] = v === null ? 0 : Number(v.toFixed(decimals[i]))
          block.codes[r * width + i] = v === null ? cell.missing : cell.value
        })
        block.values[r * width + width - 1] = phases.indexOf(row.phase)
        block.codes[r * width + width - 1] = cell.value
        nowMs = row.tMs + Math.round(1000 * scenario.logSeconds)
        change?.(rows, block)
        rows++
      }
      push({ kind: 'rows', block })
    },
    act(body: Body): void {
      push({ kind: 'act', act: { ...body, tMs: nowMs, person: 'operator 1' } as Act })
      follow()
    },
  }
}
export type Night = ReturnType<typeof night>

/** What a person records at a point, as the night's operator would. */
const seen: Readonly<Record<string, number | string>> = {
  'outlet-diverted': 'in V-02',
  'path-proven': '0.3 bar at a tenth of the flow',
  'effluent-inactive': 'below 2 mmol/L',
  'no-heat-no-gas:gas': 'no gas seen',
  'effluent-blank': 'pH 7.4',
  'karl-fischer-1': 72,
  'karl-fischer-2': 64,
}

/** Does one step as far as it goes within `mostMinutes`: begin, wait for the readings, record what a person sees, accept. True when accepted. */
export function doStep(n: Night, segment: string, step: string, mostMinutes = 60): boolean {
  n.act({ kind: 'flush-step', segment, step, state: 'started', reason: '' })
  for (let min = 0; min < mostMinutes; min++) {
    n.run(1)
    const s = n.course()!.steps.find((x) => x.step === step)!
    if (s.state !== 'running') return false
    const readingsMet = s.points.every((p) => p.by === 'person' || p.state === 'met' || p.criterion === 'quench-isolated')
    if (readingsMet)
      for (const p of s.points.filter((x) => x.by === 'person' && x.state !== 'met')) {
        const criterion = p.part === null ? p.criterion : `${p.criterion}:${p.part}`
        const value = seen[criterion] ?? 'seen'
        n.act({
          kind: 'flush-check',
          segment,
          step,
          criterion,
          verdict: 'met',
          value,
          source: 'operator 1, at the skid',
          reason: '',
        })
      }
    if (s.points.every((p) => p.state === 'met')) {
      n.act({ kind: 'flush-step', segment, step, state: 'accepted', reason: '' })
      return n.course()!.steps.find((x) => x.step === step)!.state === 'accepted'
    }
  }
  return false
}
