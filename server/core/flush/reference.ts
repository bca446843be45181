import type { Layout } from '../derive/layout.ts'
import { fluidOf } from '../fluids/fluid.ts'
import { mixedTable, type PropertyTable, propertyTable } from '../fluids/property-table.ts'
import { type ChannelGeometry, channelOf } from '../hydraulics/channel.ts'
import { cleanDp } from '../hydraulics/clean-dp.ts'
import type { GuideState, LegState, Liquid } from './course-state.ts'

const G = 9.80665
/** Below this share of its usual flow a leg's pressure drop is no reading of its resistance. */
const leastFlow = 0.1

/** ΔP without head [Pa] of a clean baseline, at its own flow of feeds [m³/s] and temperature [K]. */
export interface BaselinePoint {
  readonly dpPa: number
  readonly flowM3S: number
  readonly tempK: number
}

/** A good reading of a tag by number, SI; null where it is not. */
type Read = (tag: number) => number | null

/**
 * Measured over computed clean ΔP of a leg for the liquid that fills it: flow by its meters (mass; a volume flow at the liquid's density), temperature the mean
 * of its thermocouples, friction by `cleanDp`, head taken off. Tables are made once a flush.
 */
export function createReference(layout: Layout, s: GuideState) {
  const tables = new Map<string, PropertyTable>()
  const solvent = (name: string): PropertyTable => {
    let table = tables.get(name)
    if (table === undefined) {
      table = propertyTable(fluidOf({ kind: 'solvent', solvent: name }))
      tables.set(name, table)
    }
    return table
  }
  const legs = s.legs.map((leg) => {
    const g = layout.segments[leg.segment]!
    const parts = g.streams.map((i) => layout.skid.streams.find((x) => x.id === layout.streams[i]!.id)?.fluid ?? null)
    const known = parts.flatMap((p) => (p === null ? [] : [propertyTable(fluidOf(p))]))
    return {
      leg,
      layout: g,
      channel: (g.spec.channel === null ? null : channelOf(g.spec.channel)) as ChannelGeometry | null,
      feeds: known.length === parts.length && known.length > 0 ? mixedTable(known, leg.shares) : null,
    }
  })

  function raw(l: (typeof legs)[number], liquid: Liquid, read: Read, dpPa: number | null): number | null {
    const { channel } = l
    const table =
      liquid === 'feeds' ? l.feeds : solvent(liquid === 'water' ? 'water' : liquid === 'drying' ? s.drying : s.displacement)
    if (channel === null || table === null || dpPa === null || l.layout.temperatures.length === 0) return null
    let sumK = 0
    for (const t of l.layout.temperatures) {
      const k = read(t)
      if (k === null) return null
      sumK += k
    }
    const tempK = sumK / l.layout.temperatures.length
    const rho = table.rhoKgM3(tempK)
    let mass = 0
    let usual = 0
    for (const i of l.layout.streams) {
      const stream = layout.streams[i]!
      const q = read(stream.tag)
      if (q === null) return null
      mass += stream.isMass ? q : q * rho
      const of = s.meters.find((m) => m.tag === stream.tag)?.usualSi ?? 0
      usual += stream.isMass ? of : of * rho
    }
    if (mass <= leastFlow * usual || mass <= 0) return null
    const clean = cleanDp(channel, mass, rho, table.viscPaS(tempK))
    const model = clean.frictionPa + clean.bendPa
    const flowPa = dpPa - (channel.heightM === 0 ? 0 : rho * G * channel.heightM)
    return model <= 0 || flowPa <= 0 ? null : flowPa / model
  }

  const factorOf = (leg: LegState, liquid: Liquid): number | null =>
    liquid === 'feeds' ? leg.feedFactor : (leg.solventFactor ?? leg.feedFactor)

  return {
    /** One scan: every leg's smoothed measured over computed ΔP, or null while it cannot be told. */
    follow(liquid: Liquid | null, mixed: boolean, read: Read, dp: (segment: number) => number | null, seconds: number): void {
      for (const l of legs) {
        const now = liquid === null || mixed ? null : raw(l, liquid, read, dp(l.leg.segment))
        const weight = 1 - Math.exp(-seconds / smoothS)
        l.leg.raw = now === null ? null : l.leg.raw === null ? now : l.leg.raw + weight * (now - l.leg.raw)
      }
    },
    ratio(segment: number, liquid: Liquid): number | null {
      const leg = s.legs.find((l) => l.segment === segment)
      if (leg === undefined || leg.raw === null) return null
      const factor = factorOf(leg, liquid)
      return factor === null ? null : leg.raw / factor
    },
    /** Measured over computed ΔP of the feeds at a clean baseline; null where it cannot be computed. */
    factorAt(segment: number, at: BaselinePoint | null): number | null {
      const l = legs.find((x) => x.leg.segment === segment)
      if (l === undefined || l.channel === null || l.feeds === null || at === null || at.dpPa <= 0) return null
      const rho = l.feeds.rhoKgM3(at.tempK)
      const clean = cleanDp(l.channel, at.flowM3S * rho, rho, l.feeds.viscPaS(at.tempK))
      const model = clean.frictionPa + clean.bendPa
      return model > 0 ? at.dpPa / model : null
    },
    /** Solvent fills the path and the deposit is what it was: what remains besides the ratio before is the solvent's own factor. */
    calibrate(): void {
      for (const leg of s.legs)
        if (leg.raw !== null && leg.before !== null && leg.before > 0) leg.solventFactor = leg.raw / leg.before
    },
  }
}
export type Reference = ReturnType<typeof createReference>

/** Time constant of the smoothing, s. */
const smoothS = 30
