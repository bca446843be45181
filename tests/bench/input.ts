import { closeSync, openSync, writeSync } from 'node:fs'
import { loadSkid } from '../../server/skid/check.ts'

/** 8 pressures, 8 thermocouples, 4 flows, 4 ΔP cells; four reactors of two thermocouples, one feed and one cell each. */
export const channels = 24
/** Midnight, so that a day's log lies on one date. */
export const startMs = Date.UTC(2031, 2, 1)
const names = [
  ...Array.from({ length: 8 }, (_, i) => `PT${i + 1}_bar`),
  ...Array.from({ length: 8 }, (_, i) => `TC${i + 1}_degC`),
  ...Array.from({ length: 4 }, (_, i) => `FI${i + 1}_mLmin`),
  ...Array.from({ length: 4 }, (_, i) => `DP${i + 1}_mbar`),
]
const kinds = [
  ['pressure', 'bar', [0, 25]],
  ['temperature', 'degC', [-100, 200]],
  ['volumeFlow', 'mL/min', [0, 20]],
  ['differentialPressure', 'mbar', [0, 4000]],
] as const
const kindOf = (c: number): number => (c < 8 ? 0 : c < 16 ? 1 : c < 20 ? 2 : 3)
const decimals = [3, 2, 4, 1]

export const skidText = JSON.stringify({
  skid: 'bench', title: 'Bench', timeZone: 'UTC', scanSeconds: 1,
  tags: names.map((column, c) => {
    const [quantity, unit, range] = kinds[kindOf(c)]!
    return { tag: column.split('_')[0], column, quantity, unit, range }
  }),
  streams: [1, 2, 3, 4].map((i) => ({ id: `S${i}`, title: `feed ${i}`, flowTag: `FI${i}`, fluid: { solvent: 'toluene' } })),
  segments: [1, 2, 3, 4].map((i) => ({
    id: `R${i}`, title: `reactor ${i}`, kind: 'reactor', streams: [`S${i}`], dpTag: `DP${i}`, temperatures: [`TC${2 * i - 1}`, `TC${2 * i}`],
    channel: { diameterMm: 1, lengthM: 5 }, limits: { dpHighBar: 1.2, temperatureHighC: 150 },
  })),
}) // biome-ignore format: a skid file
export const skid = () => loadSkid(skidText, 'bench.json')

/** xorshift32: the same log on every machine. */
function noise(seed: number) {
  let s = (seed * 2654435761) >>> 0 || 1
  const uniform = () => {
    s ^= s << 13
    s >>>= 0
    s ^= s >>> 17
    s ^= s << 5
    s >>>= 0
    return s / 4294967296
  }
  return { uniform, bell: () => uniform() + uniform() + uniform() + uniform() - 2 }
}

/**
 * One row after another of a clean run in which reactor 2 fouls from half way on. `hard`: ten times the noise and two more decimals, as a finer
 * converter on a noisy sensor gives. `random`: doubles of no grid at all, the worst for any code.
 */
export function course(rows: number, kind: 'normal' | 'hard' | 'random', seed = 1) {
  const { uniform, bell } = noise(seed)
  const wide = kind === 'hard' ? 10 : 1
  const more = kind === 'hard' ? 2 : 0
  const wander = new Float64Array(channels)
  const scale = decimals.map((d) => 10 ** (d + more))
  return (r: number, into: Float64Array, at: number): void => {
    if (kind === 'random') {
      for (let c = 0; c < channels; c++) into[at + c] = (uniform() - 0.5) * 10 ** (12 * uniform() - 6)
      return
    }
    const done = r / rows
    const grown = Math.max(0, done - 0.5)
    for (let c = 0; c < channels; c++) {
      wander[c] = wander[c]! * 0.9995 + bell() * 0.02
      const i = c % 8
      const q = 1.25 + (c % 4) * 2.1 + 0.01 * wander[16 + (c % 4)]!
      const x =
        c < 8
          ? 6 + 1.7 * i + 0.05 * wander[c]! + 0.006 * wide * bell()
          : c < 16
            ? 35 + 11.3 * i + 0.8 * wander[c]! + 0.04 * wide * bell()
            : c < 20
              ? q + 0.004 * wide * bell()
              : 180 * (c === 21 ? 1 + 0.8 * grown : 1) * q * (1 - 0.004 * wander[8 + (c % 4)]!) + 1.2 * wide * bell()
      const s = scale[kindOf(c)]!
      into[at + c] = Math.round(x * s) / s
    }
  }
}

/** Writes a log of `rows` rows, ten a second. `messy`: units row, quotes, missing words, text, short rows, late and repeated rows. */
export function writeLog(file: string, rows: number, kind: 'normal' | 'hard' | 'messy'): void {
  const fd = openSync(file, 'w')
  const row = course(rows, kind === 'messy' ? 'normal' : kind)
  const { uniform } = noise(9)
  const v = new Float64Array(channels)
  const places = decimals.map((d) => d + (kind === 'hard' ? 2 : 0))
  let text = `time,${names.join(',')}\n`
  if (kind === 'messy') text += `UTC,${names.map((n) => n.split('_')[1]!.replace('mLmin', 'mL/min')).join(',')}\n`
  for (let r = 0; r < rows; r++) {
    row(r, v, 0)
    const cells = Array.from(v, (x, c) => x.toFixed(places[kindOf(c)]))
    if (kind === 'messy') {
      const dice = uniform()
      const c = Math.floor(uniform() * channels)
      if (dice < 0.02) cells[c] = ''
      else if (dice < 0.03) cells[c] = 'NaN'
      else if (dice < 0.04) cells[c] = '----'
      else if (dice < 0.06) cells[c] = `"${cells[c]}"`
      else if (dice < 0.061) cells.length = c
    }
    text += `${new Date(startMs + 100 * r).toISOString()},${cells.join(',')}\n`
    if (text.length > 1 << 20) {
      writeSync(fd, text)
      text = ''
    }
  }
  writeSync(fd, text)
  closeSync(fd)
}
