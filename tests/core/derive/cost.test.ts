import { readFileSync } from 'node:fs'
import { expect, it } from 'vitest'
import { layoutOf } from '../../../server/core/derive/layout.ts'
import { createObserver } from '../../../server/core/derive/observe.ts'
import { createStepper } from '../../../server/core/derive/step.ts'
import type { Scan } from '../../../server/core/scan/grid.ts'
import { toSi, valueUnit } from '../../../server/core/units.ts'
import { checkSkid } from '../../../server/skid/check.ts'

const file = 'fixtures/skids/heron.yaml'
const skid = checkSkid(readFileSync(new URL(`../../../${file}`, import.meta.url), 'utf8'), file).skid!
const layout = layoutOf(skid)
const usual: Readonly<Record<string, number>> = { 'FT-101': 6, 'FT-102': 2.04, 'FT-103': 0.6, 'FT-104': 12 }
const bars: Readonly<Record<string, number>> = {
  'PT-101': 9,
  'PT-102': 8.5,
  'PT-103': 5.7,
  'PT-111': 7.9,
  'PT-112': 5.4,
  'PT-113': 3.8,
  'PT-114': 3,
}
const si = skid.tags.map((t) => toSi(usual[t.tag] ?? bars[t.tag] ?? -20, valueUnit(t)))

/** Best of `rounds`, ns for each of `n`. */
function best(rounds: number, n: number, run: () => void): number {
  let least = Number.POSITIVE_INFINITY
  for (let r = 0; r < rounds; r++) {
    const from = process.hrtime.bigint()
    run()
    least = Math.min(least, Number(process.hrtime.bigint() - from))
  }
  return least / n
}

it('derives one scan in under 1 µs a segment: steps of 30 scans, flows, properties, clean ΔP and ratio together', () => {
  const observer = createObserver(layout)
  let seen = 0
  const stepper = createStepper(layout, (step) => {
    for (const s of observer.step(step, true)) if (s.observation !== null) seen++
  })
  const scans = 30_000
  const scan = {
    tMs: 0,
    rows: 1,
    phase: 1,
    used: new Float64Array(si.length).fill(1),
    si: Float64Array.from(si),
  } as unknown as Scan & { tMs: number }
  let t = 0
  const perScan = best(5, scans, () => {
    for (let i = 0; i < scans; i++) {
      scan.tMs = t
      t += 1000
      stepper.scan(scan)
    }
  })
  // Bare Hagen-Poiseuille of every segment in every scan, for scale.
  let sum = 0
  const bare = best(5, scans, () => {
    for (let i = 0; i < scans; i++)
      for (const g of layout.segments)
        sum += (128 * 6e-4 * 18 * (1e-6 + i * 1e-12)) / (Math.PI * (1.5e-3 + g.temperatures.length * 1e-9) ** 4)
  })
  const segments = layout.segments.length
  const told = `derive ${(perScan / segments).toFixed(0)} ns a scan and segment, ${(perScan / bare).toFixed(1)} times bare Hagen-Poiseuille`
  process.stdout.write(`${told}\n`)
  expect(seen).toBeGreaterThan((4 * scans) / 30)
  expect(sum).toBeGreaterThan(0)
  expect(perScan / segments, told).toBeLessThan(1000)
})
