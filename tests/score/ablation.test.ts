import { describe, expect, it } from 'vitest'
import { bankSettings } from '../../server/core/bank/bank-state.ts'
import { createPipeline, type PipelineOptions } from '../../server/core/pipeline/pipeline.ts'
import { randomScenario } from '../../server/core/sim/random-scenario.ts'
import { columns, parts } from '../../server/score/ablation.ts'
import { summarise } from '../../server/score/summary.ts'
import { simulatedBlocks } from '../helpers/simulated-blocks.ts'
import { heron } from '../helpers/skids.ts'

/** Every ratio of one run of 5-s readings, by step and segment. */
function ratios(options: PipelineOptions): (number | null)[] {
  const skid = heron()
  const pipeline = createPipeline(skid, undefined, options)
  const out: (number | null)[] = []
  for (const block of simulatedBlocks(skid, { ...randomScenario(skid, 'fouling', 2), logSeconds: 5 }))
    for (const e of pipeline.push({ kind: 'rows', block })) if (e.kind === 'step') out.push(...e.segments.map((s) => s.ratio))
  return out
}

describe('the ablation', () => {
  const whole = ratios({})

  it('takes away one thing a row: each row but the charts’ changes what the bank computes, none breaks it', () => {
    expect(new Set(parts.map((p) => p.name)).size).toBe(8)
    for (const { name, options } of parts) {
      const got = ratios(options)
      expect(got, name).toHaveLength(whole.length)
      for (const [i, x] of got.entries()) if (whole[i] !== null) expect(Number.isFinite(x), name).toBe(true)
      if (options.bank?.disturbances !== undefined && options.bank.disturbances !== bankSettings.disturbances)
        expect(got, name).not.toEqual(whole)
    }
    expect(ratios({ bank: bankSettings })).toEqual(whole)
  }, 60_000)

  it('asks for figures that score has', () => {
    const ids = new Set(summarise([]).figures.map((f) => f.id))
    for (const [id] of columns) expect(ids).toContain(id)
  })
})
