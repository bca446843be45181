import type { FluidState } from '../fluids/fluid.ts'
import type { SegmentKind } from '../skid.ts'
import { exchanger, uFromReadings } from '../thermal/exchanger.ts'
import { filmCoefficient, nusselt } from '../thermal/nusselt.ts'
import { hotSpot, plugFlowProfile } from '../thermal/profile.ts'
import { adiabaticRiseOfFeeds, mtsr, mtsrStoppedFlow } from '../thermal/reaction-heat.ts'
import { foulingResistance, type Overall, overallU } from '../thermal/wall.ts'
import type { SegmentOperation } from './operation.ts'

export interface HeatFigures {
  readonly filmWM2K: number | null
  /** Overall coefficient on the inner area, with the range of a second film correlation. */
  readonly uWM2K: number | null
  readonly uLowWM2K: number | null
  readonly uHighWM2K: number | null
  readonly regime: string | null
  readonly adiabaticRiseK: number | null
  /** Of stopped flow, K. */
  readonly mtsrK: number | null
  /** Hottest place if 99 % react within the residence time, first order, K. */
  readonly hotSpotK: number | null
  /** Outlet of a precooler fed at 20 °C, coolant at the working temperature or as given, K. */
  readonly cooledToK: number | null
  /** From the readings given, of a segment without reaction; null where they do not carry it. Fouling resistance against the clean U above. */
  readonly uNowWM2K: number | null
  readonly uNowLowWM2K: number | null
  readonly uNowHighWM2K: number | null
  readonly foulingM2KW: number | null
  readonly notes: readonly string[]
  readonly missing: readonly string[]
}

interface Coefficients {
  readonly film: number | null
  readonly u: Overall | null
  readonly low: number | null
  readonly high: number | null
  readonly regime: string | null
  readonly notes: readonly string[]
  readonly missing: readonly string[]
}

function coefficients(op: SegmentOperation, state: FluidState, re: number): Coefficients {
  const { channel } = op
  const spec = op.spec.channel
  if (channel === null || spec === null || re <= 0)
    return { film: null, u: null, low: null, high: null, regime: null, notes: [], missing: [] }
  const n = nusselt({
    re,
    pr: (state.cpJKgK * state.viscPaS) / state.condWMK,
    lengthOverDiameter: channel.lengthM / channel.diameterM,
    curvature: channel.coilDiameterM === null ? null : channel.diameterM / channel.coilDiameterM,
    heated: false,
  })
  const film = (nu: number) => filmCoefficient(nu, state.condWMK, channel.diameterM)
  const { wallMm, wallConductivityWMK, outerFilmWM2K } = spec
  const needs = [
    wallMm === null ? 'wallMm' : null,
    wallConductivityWMK === null ? 'wallConductivityWMK' : null,
    outerFilmWM2K === null ? 'outerFilmWM2K' : null,
  ].filter((x) => x !== null)
  if (wallMm === null || wallConductivityWMK === null || outerFilmWM2K === null) {
    return {
      film: film(n.nu),
      u: null,
      low: null,
      high: null,
      regime: n.regime,
      notes: n.notes,
      missing: [`U: needs channel.${needs.join(', channel.')}`],
    }
  }
  const at = (nu: number) =>
    overallU({
      innerDiameterM: channel.diameterM,
      outerDiameterM: channel.diameterM + 2e-3 * wallMm,
      wallConductivityWMK,
      innerFilmWM2K: film(nu),
      outerFilmWM2K,
      foulingM2KW: 0,
    })
  return {
    film: film(n.nu),
    u: at(n.nu),
    low: at(n.low).uInnerWM2K,
    high: at(n.high).uInnerWM2K,
    regime: n.regime,
    notes: n.notes,
    missing: [],
  }
}

/** Streams that meet here mix and react with heat that the file does not give. */
const unknownHeat: ReadonlySet<SegmentKind> = new Set<SegmentKind>(['mixer', 'quench'])

/** U of a segment without reaction from its first and last temperature; a precooler with one takes the feed's 20 °C as its inlet. */
function liveU(op: SegmentOperation, state: FluidState, wettedPerM: number): ReturnType<typeof uFromReadings> {
  const { readK, coolantK, channel, massFlowKgS, spec } = op
  const outK = readK.at(-1)
  const inK = readK.length > 1 ? readK[0] : spec.kind === 'precooler' ? op.streams[0]?.tempK : undefined
  if (
    spec.reaction !== null ||
    unknownHeat.has(spec.kind) ||
    coolantK === null ||
    channel === null ||
    massFlowKgS === null ||
    inK === undefined ||
    outK === undefined
  )
    return null
  return uFromReadings(massFlowKgS, state.cpJKgK, wettedPerM * channel.lengthM, inK, outK, coolantK, op.differenceUK)
}

/** Conversion that counts as all of it, for the rate of the assumed first-order reaction. */
const nearlyAll = 0.99

/** Heat side of a segment at its working point: film, U, adiabatic rise, hot spot, MTSR of stopped flow. Errors: THERMAL_RANGE, as the functions it calls. */
export function heatFigures(op: SegmentOperation, state: FluidState, re: number): HeatFigures {
  const c = coefficients(op, state, re)
  const missing = [...c.missing]
  const feeds = op.streams.flatMap((s) =>
    s.fluid === null || s.massFlowKgS === null
      ? []
      : [{ massFlowKgS: s.massFlowKgS, cpJKgK: s.fluid.at(s.tempK).cpJKgK, tempK: s.tempK }],
  )
  const { reaction } = op.spec
  const limiting = reaction === null ? undefined : op.streams.find((s) => s.id === reaction.limitingStream)
  const molS =
    reaction === null || limiting?.volumeFlowM3S == null ? null : limiting.volumeFlowM3S * reaction.concentrationMolL * 1e3
  const rise =
    reaction === null || molS === null || feeds.length < op.streams.length
      ? null
      : adiabaticRiseOfFeeds(molS, reaction.enthalpyKJMol * 1e3, feeds)
  const residenceS =
    op.volumeM3 === null || op.volumeFlowM3S === null || op.volumeFlowM3S <= 0 ? null : op.volumeM3 / op.volumeFlowM3S
  const coolantK = op.coolantK ?? op.tempK
  const { channel, massFlowKgS } = op
  const wettedPerM = channel === null ? 0 : ((4 * channel.areaM2) / channel.diameterM) * channel.parallel
  let hotSpotK: number | null = null
  let mtsrK = rise === null ? null : mtsr(op.tempK, 1, rise)
  if (rise !== null && c.u !== null && residenceS !== null && massFlowKgS !== null && massFlowKgS > 0 && channel !== null) {
    const profile = plugFlowProfile(
      {
        lengthM: channel.lengthM,
        massFlowKgS,
        cpJKgK: state.cpJKgK,
        uaPerMWMK: c.u.uInnerWM2K * wettedPerM,
        inletK: op.tempK,
        coolantK,
        residenceS,
        adiabaticRiseK: rise,
        rateAtInletS: -Math.log(1 - nearlyAll) / residenceS,
        activationJMol: 0,
      },
      { relTol: 1e-6, absTol: 1e-6 },
    )
    hotSpotK = hotSpot(profile).tempK
    mtsrK = mtsrStoppedFlow(profile, rise)
  }
  if (reaction !== null && rise === null)
    missing.push(`adiabatic rise: needs flow and liquid of every feed, and of ${reaction.limitingStream}`)
  const now = liveU(op, state, wettedPerM)
  const precool = op.spec.kind === 'precooler' && c.u !== null && channel !== null && massFlowKgS !== null && massFlowKgS > 0
  const cooledToK =
    !precool || c.u === null || channel === null || massFlowKgS === null
      ? null
      : exchanger({
          arrangement: 'isothermal',
          hotWK: massFlowKgS * state.cpJKgK,
          coldWK: null,
          hotInK: 293.15,
          coldInK: coolantK,
          uaWK: c.u.uInnerWM2K * wettedPerM * channel.lengthM,
        }).hotOutK
  return {
    filmWM2K: c.film,
    uWM2K: c.u?.uInnerWM2K ?? null,
    uLowWM2K: c.low,
    uHighWM2K: c.high,
    regime: c.regime,
    adiabaticRiseK: rise,
    mtsrK,
    hotSpotK,
    cooledToK,
    uNowWM2K: now?.uWM2K ?? null,
    uNowLowWM2K: now?.low ?? null,
    uNowHighWM2K: now?.high ?? null,
    foulingM2KW: now === null || c.u === null ? null : foulingResistance(now.uWM2K, c.u.uInnerWM2K),
    notes: c.notes,
    missing,
  }
}
