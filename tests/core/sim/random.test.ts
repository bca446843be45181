import { describe, expect, it } from 'vitest'
import { randomOf } from '../../../server/core/sim/random.ts'

const many = 200_000
const mean = (x: readonly number[]) => x.reduce((a, b) => a + b, 0) / x.length

describe('random numbers of the simulator', () => {
  it('gives the same stream for the same seed and name, and unrelated ones otherwise (correlation within 4/√n)', () => {
    const take = (seed: number, name: string) => {
      const r = randomOf(seed, name)
      return Array.from({ length: 20_000 }, () => r.normal())
    }
    expect(take(1, 'a')).toEqual(take(1, 'a'))
    for (const [seed, name] of [
      [2, 'a'],
      [1, 'b'],
      [4294967297, 'a'],
    ] as const) {
      const [x, y] = [take(1, 'a'), take(seed, name)]
      expect(Math.abs(mean(x.map((v, i) => v * y[i]!)))).toBeLessThan(4 / Math.sqrt(20_000))
    }
  })

  it('draws uniform numbers: every tenth holds a tenth, chi-square on 9 degrees below 27.9 (0.1 %)', () => {
    const r = randomOf(7, 'uniform')
    const counts = Array(10).fill(0) as number[]
    for (let i = 0; i < many; i++) counts[Math.floor(10 * r.next())]!++
    expect(counts.reduce((x, c) => x + (c - many / 10) ** 2 / (many / 10), 0)).toBeLessThan(27.9)
  })

  it('draws normal numbers: mean 0, variance 1, kurtosis 3, 2.5 % above 1.96, each within four standard errors', () => {
    const r = randomOf(8, 'normal')
    const x = Array.from({ length: many }, () => r.normal())
    expect(Math.abs(mean(x))).toBeLessThan(4 / Math.sqrt(many))
    expect(Math.abs(mean(x.map((v) => v * v)) - 1)).toBeLessThan(4 * Math.sqrt(2 / many))
    expect(Math.abs(mean(x.map((v) => v ** 4)) - 3)).toBeLessThan(4 * Math.sqrt(96 / many))
    expect(Math.abs(x.filter((v) => v > 1.959964).length / many - 0.025)).toBeLessThan(4 * Math.sqrt((0.025 * 0.975) / many))
  })

  it('draws exponential numbers of mean 30 within four standard errors', () => {
    const r = randomOf(9, 'exponential')
    expect(Math.abs(mean(Array.from({ length: many }, () => r.exponential(30))) - 30)).toBeLessThan((4 * 30) / Math.sqrt(many))
  })
})
