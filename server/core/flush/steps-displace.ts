import { cFromK, kFromC } from '../units.ts'
import { cappedFlow } from './hydraulic-cap.ts'
import { cleanPath } from './legs.ts'
import { addKnown, type Built, criterion, type Flows, finish, parallelHazard, pumpMinutes, type Stage } from './stage.ts'
import { washout } from './washout.ts'

const activeNames = ({ path, active }: Stage): string =>
  path.operation.streams
    .filter((s) => active.includes(s.id))
    .map((s) => `${s.id} (${s.spec.reagent?.name ?? s.spec.title})`)
    .join(', ')

/** F0: stop making more, divert, prove the way. */
export function prepare(stage: Stage): Built {
  const { settings, path } = stage
  const reagent = activeNames(stage)
  const partners = path.operation.streams
    .filter(
      (s) => !stage.active.includes(s.id) && s.spec.reagent !== null && path.legs.some((l) => l.op.spec.streams.includes(s.id)),
    )
    .map((s) => s.id)
  return {
    missing: reagent === '' ? ['which feed carries the organolithium: name the reagent of that stream'] : [],
    step: finish({
      id: 'F0',
      title: 'Prepare: stop making more',
      liquid: null,
      flowM3S: null,
      volumeM3: null,
      minutes: settings.confirmMinutes,
      holdPoints: [
        'Before this step: approved site procedure, competent person and permit in place; waste vessel compatible, vented, not aqueous while the effluent is active; nitrogen purge running.',
        'Before this step: list of ratings read, lowest-rated component of the path known.',
      ],
      criteria: [
        criterion(
          'reagent-stopped',
          `flow of ${reagent === '' ? 'the organolithium feed' : reagent} is zero by two independent signs, then of the partner feeds${partners.length === 0 ? '' : ` ${partners.join(', ')}`}`,
        ),
        criterion('outlet-diverted', 'outlet diverted from product'),
        criterion('path-proven', 'flush path proven open at low pressure drop'),
      ],
      hazards: [
        'Assume the line holds active organolithium until the effluent test says otherwise.',
        'Do not raise pressure to clear a blockage: no flow at the pressure limit means stop feeds, make safe, isolate, escalate.',
        'Oxygen-deficient space around the purged box: site entry procedure.',
      ],
      basis: [`${settings.confirmMinutes} min counted for checking and confirming (assumed)`],
    }),
  }
}

/** F1: dry, cold, aprotic solvent displaces the reactive inventory. */
export function displace(stage: Stage): Built & Flows {
  const { path, settings, liquids } = stage
  const cold = (leg: { readonly op: { readonly coldestK: number } }) => leg.op.coldestK
  const cap = cappedFlow(path, liquids.displacement, cold, settings.dpShare)
  const out = washout(path, settings.residualFraction, liquids.displacement, cap.flowM3S, cold, settings.rtd)
  return {
    flowM3S: cap.flowM3S,
    clearM3S: cappedFlow(cleanPath(path), liquids.displacement, cold, settings.dpShare).flowM3S,
    missing: [...cap.missing, ...out.missing],
    step: finish({
      id: 'F1',
      title: 'Displace with dry solvent, still cold',
      liquid: `dry ${liquids.displacement.name}`,
      flowM3S: cap.flowM3S,
      volumeM3: out.volumeM3,
      minutes: addKnown(pumpMinutes(out.volumeM3, cap.flowM3S), settings.confirmMinutes),
      holdPoints: [
        'Before this step: F0 accepted; peroxide test of the solvent in date.',
        `Every leg in turn, with bypasses and dead legs${path.legs.length > 1 ? `: ${path.legs.map((l) => l.id).join(', ')}` : ''}; the last volume fully water-miscible (here ${liquids.displacement.name} throughout).`,
        ...(path.hasQuench
          ? [
              'Aqueous quench advised to keep flowing while the effluent is active, its pressure below the reactor outlet, and to be isolated before F2.',
            ]
          : []),
      ],
      criteria: [
        criterion(
          'volume',
          `volume passed${out.volumeM3 === null ? ' (not computed: set one by the site procedure)' : `${out.atLeast ? ', at least' : ''} ${(out.volumeM3 * 1e6).toFixed(0)} mL, counted by flow and not by clock`}`,
        ),
        criterion('reaction-heat-gone', 'outlet within 1 K of the blank against the coolant'),
        criterion('effluent-inactive', 'test of the effluent for active organolithium below the site limit'),
        ...(path.hasQuench ? [criterion('quench-isolated', 'aqueous quench isolated from the flush path')] : []),
      ],
      hazards: [
        ...parallelHazard(path),
        ...(path.hasQuench
          ? [
              'Back-flow: water reaches the reagent if the outlet pressure falls below the quench pressure; hold advised if it does.',
            ]
          : []),
        'Any exotherm or a rising pressure drop: hold advised.',
        'Waste vessel: compatible, vented, not aqueous while F1 effluent is active.',
        'No verdict on the ratio while two liquids share a segment.',
      ],
      basis: [
        `flow limited by: ${cap.limitedBy}`,
        ...cap.legs
          .filter((l) => l.leg.asked)
          .map((l) => `${l.leg.id}: ${(l.predictedPa / 1e5).toFixed(2)} bar predicted at ${cFromK(l.tempK).toFixed(0)} °C`),
        ...out.basis,
        ...(stage.activeMol === null || out.volumeM3 === null
          ? []
          : [
              `leaves at most ${(stage.activeMol * settings.residualFraction * 1e3).toPrecision(2)} mmol of ${(stage.activeMol * 1e3).toPrecision(3)} mmol organolithium, by the model`,
            ]),
      ],
    }),
  }
}

/** F2: warm every wetted place above freezing of water, outlet open. */
export function warm(stage: Stage): Built {
  const { path, settings } = stage
  const times = path.legs.map((leg) => {
    const rate = leg.op.spec.warmUpKPerMin ?? settings.warmUpKPerMin
    return {
      leg,
      rate,
      assumed: leg.op.spec.warmUpKPerMin === null,
      minutes: Math.max(0, kFromC(settings.warmC) - leg.op.coldestK) / rate,
    }
  })
  const slowest = times.reduce(
    (a, b) => (b.minutes > a.minutes ? b : a),
    times[0] ?? { leg: null, rate: settings.warmUpKPerMin, assumed: true, minutes: 0 },
  )
  return {
    missing: [],
    step: finish({
      id: 'F2',
      title: 'Warm up, outlet open',
      liquid: `dry ${stage.liquids.displacement.name}, standing`,
      flowM3S: 0,
      volumeM3: 0,
      minutes: slowest.minutes + settings.warmHoldMinutes + settings.confirmMinutes,
      holdPoints: [
        'Before this step: F1 accepted; an open path to relief and the outlet confirmed.',
        'Cooling off; no end of a liquid-full line closed.',
      ],
      criteria: [
        criterion(
          'all-warm',
          `every channel, precooler and cold spot above +${settings.warmC} °C for ${settings.warmHoldMinutes} min, every reading good`,
        ),
        criterion('no-blocked-in', 'pressure did not rise blocked-in'),
      ],
      hazards: [
        'Never close both ends of a cold liquid-full line; keep an open path to relief (cold tetrahydrofuran gains about 12 bar/K in a rigid full line).',
        'A bad sensor on a cold spot: hold, it does not count as warm.',
        'A line still holding reagent makes gas and heat as it warms.',
      ],
      basis: [
        `slowest: ${slowest.leg?.id ?? 'none'}, ${slowest.leg === null ? 0 : cFromK(slowest.leg.op.coldestK).toFixed(0)} °C to +${settings.warmC} °C at ${slowest.rate} K/min${slowest.assumed ? ' (assumed)' : ''}: ${slowest.minutes.toFixed(1)} min, then ${settings.warmHoldMinutes} min hold`,
        ...times.filter((t) => t.assumed).map((t) => `${t.leg.id}: warm-up rate not given, ${t.rate} K/min assumed`),
      ],
    }),
  }
}
