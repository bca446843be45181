import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { isMap, isNode, isScalar, parseDocument, visit, type YAMLMap } from 'yaml'
import { checkSkid } from '../../server/skid/check.ts'

const file = 'fixtures/skids/heron.yaml'
const heron = readFileSync(file, 'utf8')
const lineOf = (offset: number) => heron.slice(0, offset).split('\n').length

interface Key {
  /** Path without indices: segments.limits.dpHighBar. */
  readonly path: string
  readonly from: number
  readonly to: number
  /** Text of the key and its value, with what joins it to the next pair. */
  readonly cut: readonly [from: number, to: number]
  readonly groupLine: number
}

/** Every key of the fixture with its place, by an independent reading of the file. */
function keysOf(text: string): Key[] {
  const keys: Key[] = []
  visit(parseDocument(text), {
    Pair(_, pair, ancestors) {
      const key = pair.key
      const map = ancestors.at(-1)
      if (!isScalar(key) || !key.range || !isMap(map)) throw new Error('a plain key wanted')
      const names = ancestors.flatMap((a) => ('key' in a && isScalar(a.key) ? String(a.key.value) : []))
      const [from, to] = key.range
      keys.push({
        path: [...names, String(key.value)].join('.'),
        from,
        to,
        cut: cutOf(map, map.items.indexOf(pair)),
        groupLine: lineOf(map.range?.[0] ?? 0),
      })
    },
  })
  return keys
}

const rangeOf = (node: unknown): [number, number] => {
  const range = isNode(node) ? node.range : null
  if (!range) throw new Error('a node with a place wanted')
  return [range[0], range[1]]
}

function cutOf(map: YAMLMap, index: number): [number, number] {
  const pair = map.items[index]
  const next = map.items[index + 1]
  const before = map.items[index - 1]
  if (next !== undefined) return [rangeOf(pair?.key)[0], rangeOf(next.key)[0]]
  return [map.flow && before !== undefined ? rangeOf(before.value)[1] : rangeOf(pair?.key)[0], rangeOf(pair?.value)[1]]
}
const keys = keysOf(heron)

describe('the demo skid heron', () => {
  it('has no mistakes, 23 tags, 4 streams and 6 segments in flow order', () => {
    const { skid, problems } = checkSkid(heron, file)
    expect(problems).toEqual([])
    expect(skid?.skid).toBe('heron')
    expect(skid?.tags.length).toBe(23)
    expect(skid?.streams.map((s) => s.id)).toEqual(['A', 'B', 'C', 'D'])
    expect(skid?.segments.map((s) => s.id)).toEqual(['PA', 'PB', 'R1', 'PC', 'R2', 'Q1'])
  })

  it(`says of each of its ${keys.length} keys, misspelt, that it is unknown, at that key's line and column`, () => {
    expect(keys.length).toBeGreaterThan(350)
    for (const key of keys) {
      const name = heron.slice(key.from, key.to)
      const text = `${heron.slice(0, key.from)}${name[0]}q${name.slice(1)}${heron.slice(key.to)}`
      const column = key.from - heron.lastIndexOf('\n', key.from - 1)
      const there = checkSkid(text, file).problems.filter((p) => p.line === lineOf(key.from) && p.column === column)
      expect(
        there.map((p) => p.message.slice(0, 11)),
        `${key.path} on line ${lineOf(key.from)}`,
      ).toEqual(['unknown key'])
      expect(there[0]?.hint, key.path).toBe(
        key.path.startsWith('alarms.') && !key.path.includes('.', 7) ? "did you mean 'fouling'?" : `did you mean '${name}'?`,
      )
    }
  })

  it('is refused without a key that is needed, at the group that lacks it, and good without any other', () => {
    // biome-ignore format: one list
    const needed = new Set([
      'skid', 'tags', 'streams', 'segments', 'tags.tag', 'tags.quantity', 'tags.unit', 'streams.id', 'streams.flowTag', 'streams.fluid.solvent',
      'streams.reagent.name', 'streams.reagent.concentrationMolL', 'segments.id', 'segments.kind', 'segments.streams', 'segments.pressureIn',
      'segments.pressureOut', 'segments.limits.feedRatio.of', 'segments.limits.feedRatio.low', 'segments.limits.feedRatio.high',
      'segments.reaction.limitingStream', 'segments.reaction.concentrationMolL', 'segments.reaction.enthalpyKJMol',
    ])
    // A feed ratio needs its reagents: leaving one out is told at the ratio. `alarms` with nothing under it is told at its key.
    const elsewhere = ['streams.reagent', 'alarms.fouling:R1']
    const refused = new Set<string>()
    const firstAndLast = keys.filter(
      (key) => key === keys.find((k) => k.path === key.path) || key === keys.findLast((k) => k.path === key.path),
    )
    for (const key of firstAndLast) {
      const { skid, problems } = checkSkid(heron.slice(0, key.cut[0]) + heron.slice(key.cut[1]), file)
      if (skid !== null) continue
      refused.add(key.path)
      const what = `${key.path} of line ${lineOf(key.from)}: ${problems.map((p) => `${p.line} ${p.message}`).join(' | ')}`
      if (!elsewhere.includes(key.path))
        expect(
          problems.map((p) => p.line),
          what,
        ).toContain(key.groupLine)
    }
    expect([...refused].sort()).toEqual([...needed, ...elsewhere].sort())
  })

  /** `#   R1   2 × 1.5 × 18   0.697 …` in the file's comment. */
  const rows = [
    ...heron.matchAll(
      /^# {3}(\w\w) +(\d) × ([\d.]+) × ([\d.]+) +([\d.]+) +([\d.]+) +([\d.]+) +(\d+) +(\d+) +([\d.]+) +([\d.]+)$/gm,
    ),
  ]
  it.each(rows.map((row) => [row[1] ?? '', row.slice(2).map(Number)] as const))(
    'the hand calculation in its comment holds for %s within its last digit (Hagen-Poiseuille; White 1929)',
    (id, [
      branches = 0,
      dMm = 0,
      lengthM = 0,
      muMPaS = 0,
      qMlMin = 0,
      straightBar = 0,
      re = 0,
      de = 0,
      coilF = 0,
      cleanBar = 0,
    ]) => {
      const segment = checkSkid(heron, file).skid?.segments.find((s) => s.id === id)
      const channel = segment?.channel
      expect([channel?.parallel, channel?.diameterMm, channel?.lengthM]).toEqual([branches, dMm, lengthM])
      expect((segment?.volumeMl ?? 0) / ((Math.PI / 4) * dMm ** 2 * lengthM * branches)).toBeCloseTo(1, 1)
      const dp = (128 * muMPaS * 1e-3 * lengthM * (qMlMin * 1e-6)) / 60 / (Math.PI * (dMm * 1e-3) ** 4) / 1e5
      expect(Math.abs(dp - straightBar)).toBeLessThan(0.003)
      expect(Math.abs(re * Math.sqrt(dMm / (channel?.coilDiameterMm ?? 0)) - de)).toBeLessThan(1)
      const factor = 1 / (1 - (1 - (11.6 / de) ** 0.45) ** 2.22)
      expect(Math.abs(factor - coilF)).toBeLessThan(0.011)
      expect(Math.abs(straightBar * factor - cleanBar)).toBeLessThan(0.015)
      expect(segment?.limits.dpHighBar ?? 0).toBeGreaterThan(1.8 * cleanBar)
      expect(segment?.limits.dpHighBar ?? 0).toBeLessThan(4 * cleanBar)
    },
  )
  it('gives that calculation for each of its six segments', () => {
    expect(rows.map((row) => row[1])).toEqual(['PA', 'PB', 'PC', 'R1', 'R2', 'Q1'])
  })
})

const shared = '../shared/bench-open'
describe.runIf(existsSync(shared))('the twelve skid files of the shared bench', () => {
  const cases = existsSync(shared) ? readdirSync(shared).filter((name) => existsSync(`${shared}/${name}/skid.json`)) : []
  it(`load without a mistake (${cases.length} here)`, () => {
    expect(cases.length).toBe(12)
    for (const name of cases)
      expect(checkSkid(readFileSync(`${shared}/${name}/skid.json`, 'utf8'), name).problems, name).toEqual([])
  })
})
if (!existsSync(shared)) console.log('not here: ../shared/bench-open; its twelve skid files were not read')
