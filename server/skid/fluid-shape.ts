import { solventNamed, solvents, solventWords } from '../core/fluids/solvents.ts'
import type { FluidSpec } from '../core/skid.ts'
import { nearest } from './nearest.ts'
import { pathText } from './problem.ts'
import { group, list, number, type Reader, text } from './readers.ts'

const solvent = text(`one of ${solvents.map((s) => s.name).join(', ')}`, (value) => {
  if (solventNamed(value) !== null) return null
  const near = nearest(value, solventWords)
  return { hint: near === null ? 'or give densityKgM3 and viscosityMPaS of the liquid' : `did you mean '${near}'?` }
})
const keys = group({
  solvent,
  mixture: list(group({ solvent, massFraction: number({ above: 0, max: 1 }) }, { required: ['solvent', 'massFraction'] }), {
    min: 1,
    name: 'solvents with their massFraction',
  }),
  densityKgM3: number({ min: 100, max: 25_000, unit: 'kg/m3; 1 g/mL is 1000' }),
  viscosityMPaS: list(list(number({ min: -273.15, max: 1e6 }), { min: 2, max: 2, name: 'numbers [tempC, mPa s]' }), {
    min: 1,
    name: '[tempC, mPa s] pairs',
  }),
})
const says = 'a solvent, or a mixture, or densityKgM3 with viscosityMPaS'

/** `fluid`: one solvent, a mixture by mass, or the user's own density and viscosity table; exactly one of the three. */
export const fluidShape: Reader<FluidSpec> = {
  says,
  ...(keys.keys === undefined ? {} : { keys: keys.keys }),
  read(at, path, walk) {
    const before = walk.problems.length
    const found = keys.read(at, path, walk)
    if (found === undefined) return undefined
    const has = (key: string) => walk.has([...path, key])
    const own = has('densityKgM3') || has('viscosityMPaS')
    const ways = [has('solvent') && 'solvent', has('mixture') && 'mixture', own && 'densityKgM3 and viscosityMPaS'].filter(
      (w) => w !== false,
    )
    if (ways.length !== 1 && (ways.length > 1 || walk.problems.length === before)) {
      walk.say(
        path,
        ways.length === 0 ? 'fluid names no liquid' : `fluid gives ${ways.join(' as well as ')}`,
        says,
        ways.length === 0 ? 'for example { solvent: tetrahydrofuran }' : 'keep one',
      )
    }
    for (const [key, other] of [
      ['densityKgM3', 'viscosityMPaS'],
      ['viscosityMPaS', 'densityKgM3'],
    ] as const) {
      if (has(key) && !has(other)) walk.say([...path, key], `${key} without ${other}`, 'both, or a solvent', `add ${other}`)
    }
    const sum = (found.mixture ?? []).reduce((total, part) => total + (part?.massFraction ?? Number.NaN), 0)
    if (Math.abs(sum - 1) > 0.001 && found.mixture?.length)
      walk.say([...path, 'mixture'], `the mass fractions sum to ${Number(sum.toPrecision(6))}`, 'a sum of 1 within 0.001')
    const named = new Set<string>()
    found.mixture?.forEach((part, i) => {
      const name = part?.solvent === undefined ? null : (solventNamed(part.solvent)?.name ?? null)
      if (name !== null && named.has(name))
        walk.say(
          [...path, 'mixture', i, 'solvent'],
          `${name} stands twice in the mixture`,
          'each solvent once',
          'add the fractions up',
        )
      if (name !== null) named.add(name)
    })
    found.viscosityMPaS?.forEach((point, i, all) => {
      const [tempC, value] = point ?? []
      const last = all[i - 1]?.[0]
      const here = [...path, 'viscosityMPaS', i]
      if (value !== undefined && !(value > 0)) walk.say([...here, 1], `a viscosity of ${value} mPa s`, 'a number above 0 (mPa s)')
      if (tempC !== undefined && last !== undefined && tempC <= last)
        walk.say(
          [...here, 0],
          `${pathText(['viscosityMPaS', i])} is at ${tempC} °C after ${last} °C`,
          'rising temperatures',
          'sort the points by temperature',
        )
    })
    if (walk.problems.length > before) return undefined
    return spec(found)
  },
}

/** Only called once nothing is wrong with it. */
function spec(found: NonNullable<ReturnType<typeof keys.read>>): FluidSpec | undefined {
  const full = (name: string | undefined): string => solventNamed(name ?? '')?.name ?? ''
  if (found.solvent !== undefined) return { kind: 'solvent', solvent: full(found.solvent) }
  if (found.mixture !== undefined)
    return {
      kind: 'mixture',
      parts: found.mixture.map((part) => ({ solvent: full(part?.solvent), massFraction: part?.massFraction ?? 0 })),
    }
  if (found.densityKgM3 === undefined || found.viscosityMPaS === undefined) return undefined
  return {
    kind: 'table',
    densityKgM3: found.densityKgM3,
    viscosityMPaS: found.viscosityMPaS.map((point) => [point?.[0] ?? 0, point?.[1] ?? 0] as const),
  }
}
