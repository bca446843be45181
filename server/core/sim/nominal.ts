import { MonitorError } from '../errors.ts'
import { fromSi, toSi, valueUnit } from '../units.ts'
import { CELLS, cleanPressure, FEED_K, type Plant, type PlantSegment } from './plant-model.ts'
import type { Scenario } from './scenario.ts'

/** Where the tightest limit stands against the clean ΔP when flows are chosen here. */
const LOADED = 0.42

/** Nominal flows: as the scenario says; else in the mol ratio that limits ask for, by range where nothing relates them, scaled to `LOADED`. */
export function setFlows(plant: Plant, scenario: Scenario): void {
  const { skid, streams } = plant
  const rho = streams.map((s) => s.fluid.rhoKgM3(FEED_K))
  const tagOf = (i: number) => skid.tags.find((t) => t.tag === streams[i]!.spec.flowTag) ?? null
  const kgS = (i: number, value: number) => {
    const tag = tagOf(i)
    const si = toSi(value, tag === null ? 'kg/h' : valueUnit(tag))
    return tag?.quantity === 'volumeFlow' ? si * rho[i]! : si
  }
  const relative = streams.map((_, i) => {
    const top = tagOf(i)?.range?.[1]
    // Equal meters say nothing of the feeds: the first is taken to be the main one.
    const like = i > 0 && (top === undefined || top === tagOf(0)?.range?.[1]) ? 0.42 : 1
    return like * (top === undefined ? 1e-3 : kgS(i, top))
  })
  const litres = (i: number) => relative[i]! / rho[i]!
  for (const s of skid.segments) {
    const want = s.limits.feedRatio
    if (want === null) continue
    const [a, b] = want.of.map((id) => skid.streams.findIndex((x) => x.id === id))
    const ca = skid.streams[a ?? -1]?.reagent?.concentrationMolL
    const cb = skid.streams[b ?? -1]?.reagent?.concentrationMolL
    if (a === undefined || b === undefined || ca === undefined || cb === undefined) continue
    relative[a] = litres(b) * ((want.low + want.high) / 2) * (cb / ca) * rho[a]!
  }
  const apply = (scale: number) => {
    streams.forEach((s, i) => {
      const given = scenario.flows?.[s.spec.id]
      s.nominalKgS = given === undefined ? relative[i]! * scale : kgS(i, given)
    })
  }
  const loaded = (scale: number) => {
    apply(scale)
    return Math.max(
      0,
      ...plant.segments.map((s) => (s.geometry === null || s.dpHighPa === null ? 0 : nominalClean(plant, s) / s.dpHighPa)),
    )
  }
  let [low, high] = [1e-4, 0.6]
  for (let i = 0; i < 40; i++) {
    const mid = (low + high) / 2
    if (loaded(mid) > LOADED) high = mid
    else low = mid
  }
  apply(plant.segments.some((s) => s.geometry !== null && s.dpHighPa !== null) ? low : 0.3)
  for (const s of plant.segments) {
    if (s.geometry !== null) continue
    const kg = s.streams.reduce((sum, i) => sum + streams[i]!.nominalKgS, 0)
    const tK = plant.coolants[s.coolant]!.nominalK
    const main = streams[s.streams[0]!]!.fluid
    s.assumed = {
      dpPa: s.dpHighPa === null ? 25_000 : 0.38 * s.dpHighPa,
      viscPaS: main.viscPaS(tK),
      rhoKgM3: main.rhoKgM3(tK),
      kgS: kg,
    }
  }
}

/** Clean ΔP without static head at nominal flow, the fluid at the coolant's temperature (a precooler's: half way), Pa. */
export function nominalClean(plant: Plant, s: PlantSegment): number {
  const cold = plant.coolants[s.coolant]!.nominalK
  const cells = Array.from({ length: CELLS }, (_, c) =>
    s.upstream.includes(-1) ? cold + (FEED_K - cold) * Math.exp(-s.ntu * ((c + 0.5) / CELLS)) : cold,
  )
  return cleanPressure(
    plant,
    s,
    plant.streams.map((x) => x.nominalKgS),
    plant.streams.map(() => 1),
    cells,
  ).flowPa
}

/** dpHighBar over the clean ΔP at nominal flow; 2 where the skid file sets no limit. Errors: SIM_OPTION where clean is too near it to foul. */
export function limitRatio(plant: Plant, id: string): number {
  const s = plant.segments.find((x) => x.spec.id === id)!
  if (s.dpHighPa === null) return 2
  const ratio = s.dpHighPa / nominalClean(plant, s)
  if (ratio < 1.15) {
    throw new MonitorError(
      'SIM_OPTION',
      `segment ${id} cannot foul: its clean dP is ${(100 / ratio).toFixed(0)} % of dpHighBar at the flows simulated`,
      {
        hint: 'lower the flows of the scenario or raise dpHighBar in the skid file',
      },
    )
  }
  return ratio
}

/** dpHighBar, or what stands for it where the skid file has none, bar. */
export const limitBar = (plant: Plant, id: string): number => {
  const s = plant.segments.find((x) => x.spec.id === id)!
  return fromSi(s.dpHighPa ?? 2 * nominalClean(plant, s), 'bar')
}
