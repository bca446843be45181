import { cFromK, kFromC } from '../units.ts'
import { cappedFlow } from './hydraulic-cap.ts'
import { cleanPath } from './legs.ts'
import { addKnown, type Built, criterion, finish, pumpMinutes, type Stage } from './stage.ts'
import { washout } from './washout.ts'

/** F5: the deposit is gone by now, the clean channel counts. Cool again with dry solvent flowing. */
export function recool(stage: Stage): Built {
  const { settings, liquids } = stage
  const path = cleanPath(stage.path)
  const cap = cappedFlow(path, liquids.drying, (l) => l.op.coldestK, settings.dpShare)
  const times = path.legs.map((leg) => ({
    leg,
    minutes: Math.max(0, kFromC(settings.warmC) - leg.op.tempK) / (leg.op.spec.warmUpKPerMin ?? settings.warmUpKPerMin),
  }))
  const slowest = times.reduce((a, b) => (b.minutes > a.minutes ? b : a), times[0] ?? { leg: null, minutes: 0 })
  return {
    missing: cap.missing,
    step: finish({
      id: 'F5',
      title: 'Cool again with dry solvent flowing',
      liquid: `dry ${liquids.drying.name}`,
      flowM3S: cap.flowM3S,
      volumeM3: cap.flowM3S === null ? null : cap.flowM3S * slowest.minutes * 60,
      minutes: slowest.minutes + settings.confirmMinutes,
      holdPoints: ['Before this step: F4 accepted (no cooling until the water test passes); dew point of the box low.'],
      criteria: [
        criterion('ratio-clean', 'ratio at the temperature-corrected clean value within 10 %'),
        criterion('no-ice', 'no rise of the pressure drop while crossing 0 °C'),
      ],
      hazards: [
        'Any rise of the pressure drop near or below 0 °C means ice: advised is to stop cooling and to warm.',
        'A ratio that stays above clean is "not fully restored": recorded, not adopted as the new baseline.',
      ],
      basis: [
        `flow limited by: ${cap.limitedBy}`,
        `slowest: ${slowest.leg?.id ?? 'none'}, +${settings.warmC} °C to ${slowest.leg === null ? 0 : cFromK(slowest.leg.op.tempK).toFixed(0)} °C at its warm-up rate, cooling taken as fast (assumed)`,
      ],
    }),
  }
}

/** F6: back to control with the outlet diverted. */
export function restart(stage: Stage): Built {
  const { settings, active } = stage
  const path = cleanPath(stage.path)
  const fluid = stage.liquids.drying
  const normal = (l: { readonly op: { readonly tempK: number } }) => l.op.tempK
  const cap = cappedFlow(path, fluid, normal, 1)
  const out = washout(path, settings.restartFraction, fluid, cap.flowM3S, normal, settings.rtd)
  return {
    missing: [...cap.missing, ...out.missing],
    step: finish({
      id: 'F6',
      title: 'Restart with the outlet diverted',
      liquid: 'feeds',
      flowM3S: cap.flowM3S,
      volumeM3: out.volumeM3,
      minutes: addKnown(pumpMinutes(out.volumeM3, cap.flowM3S), settings.confirmMinutes),
      holdPoints: [
        `Before this step: F5 accepted; feed drums' Karl Fischer results in date. Order advised: solvent, partner feeds, ${active.length === 0 ? 'organolithium' : active.join(', ')} last.`,
      ],
      criteria: [
        criterion(
          'volume',
          `residence volumes passed since the last feed started${out.volumeM3 === null ? '' : `: ${(out.volumeM3 * 1e6).toFixed(0)} mL`}`,
        ),
        criterion('in-control', 'state-of-control criteria met; ratio, temperature profile and pressure ratio inside their limits'),
      ],
      hazards: ['A feed-ratio or hot-spot alarm: hold, outlet stays diverted.'],
      basis: [
        `until ${settings.restartFraction} of the old content is left at the outlet, residence times at the flow of the feeds, with ${fluid.name} for their viscosity`,
        ...out.basis,
      ],
    }),
  }
}
