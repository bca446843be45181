import { leastWater } from '../deposit/lithium-salts.ts'
import type { WaterReference } from '../report.ts'
import { barFromPa, cFromK, kFromC, mlMinFromM3s } from '../units.ts'
import { cappedFlow } from './hydraulic-cap.ts'
import { depositKg } from './inventory.ts'
import { cleanPath } from './legs.ts'
import { waterShareLeft } from './liquids.ts'
import { addKnown, type Built, criterion, type Flows, finish, parallelHazard, pumpMinutes, type Stage, shown } from './stage.ts'
import { washout } from './washout.ts'

/**
 * F3: water dissolves LiOH and lithium halides. Viscosity of water at the coldest place that F2 accepts, volume the larger of what the solubility
 * asks (with margin) and the washout, the first volume of the way at the starting share of the flow.
 */
export function water(stage: Stage): Built & Flows & { readonly reference: readonly WaterReference[] } {
  const { path, settings, liquids } = stage
  const tempK = kFromC(settings.warmC)
  const at = () => tempK
  const cap = cappedFlow(path, liquids.water, at, settings.dpShare)
  const out = washout(path, settings.washFraction, liquids.water, cap.flowM3S, at, settings.rtd)
  const masses = path.legs.map((leg) => ({ leg, kg: depositKg(leg) }))
  const unknown = masses.filter((m) => m.kg === null).map((m) => m.leg.id)
  const kg = unknown.length > 0 ? null : masses.reduce((a, m) => a + (m.kg ?? 0), 0)
  const least = kg === null ? null : leastWater('LiOH', kg, settings.warmC)
  const dissolveM3 = least === null ? null : least.volumeM3 * settings.dissolveMargin
  const volumeM3 = out.volumeM3 === null || dissolveM3 === null ? null : out.volumeM3 + dissolveM3
  // over all the water of the step, not the least: the lower figure holds earlier
  const riseK =
    least === null || volumeM3 === null
      ? null
      : least.heatJ / (volumeM3 * liquids.water.at(tempK).rhoKgM3 * liquids.water.at(tempK).cpJKgK)
  const startM3 = out.pathM3 === null || volumeM3 === null ? null : Math.min(out.pathM3, volumeM3)
  const minutes = addKnown(
    pumpMinutes(startM3, cap.flowM3S === null ? null : cap.flowM3S * settings.waterStartShare),
    pumpMinutes(volumeM3 === null || startM3 === null ? null : volumeM3 - startM3, cap.flowM3S),
    settings.soakMinutes,
    settings.confirmMinutes,
  )
  const reference = cap.legs.map(
    (l): WaterReference => ({
      segment: l.leg.id,
      ratio: l.leg.ratio,
      flowMlMin: mlMinFromM3s(l.flowM3S),
      tempC: cFromK(l.tempK),
      cleanDpBar: barFromPa(l.cleanPa),
      predictedDpBar: barFromPa(l.predictedPa),
      dpHighBar: l.leg.op.spec.limits.dpHighBar,
    }),
  )
  return {
    reference,
    flowM3S: cap.flowM3S,
    clearM3S: cappedFlow(cleanPath(path), liquids.water, at, settings.dpShare).flowM3S,
    missing: [
      ...cap.missing,
      ...out.missing,
      ...(unknown.length > 0
        ? [`deposit in ${unknown.join(', ')} and the water to dissolve it: needs channel, flow and liquid`]
        : []),
    ],
    step: finish({
      id: 'F3',
      title: 'Water: dissolve the deposit',
      liquid: 'water',
      flowM3S: cap.flowM3S,
      volumeM3,
      minutes,
      holdPoints: [
        'Before this step: F1 and F2 accepted, both. Do not admit water before displacement and warm-up are both confirmed.',
        `Advised start: ${shown(cap.flowM3S === null ? null : mlMinFromM3s(cap.flowM3S * settings.waterStartShare), 'mL/min')} (${(100 * settings.waterStartShare).toFixed(0)} % of the flow) for the first volume of the path, watching temperature and off-gas; then up to the flow above.`,
        ...(settings.soakMinutes > 0
          ? [`Soak of ${settings.soakMinutes} min, outlet open.`]
          : ['A soak is optional; none is counted.']),
      ],
      criteria: [
        criterion(
          'no-heat-no-gas',
          `no temperature rise beyond ${shown(riseK === null ? null : riseK + 3, 'K', 2)} (computed heat of dissolution and 3 K), no gas`,
        ),
        criterion(
          'ratio-flat',
          `ratio against the water reference falling, then flat within 10 to 20 % of clean${
            reference.length === 0
              ? ''
              : `: clean ${reference
                  .filter((r) => path.legs.some((l) => l.id === r.segment && l.asked))
                  .map(
                    (r) =>
                      `${r.segment} ${r.cleanDpBar.toFixed(2)} bar at ${r.flowMlMin.toFixed(0)} mL/min and ${r.tempC.toFixed(0)} °C`,
                  )
                  .join(', ')}`
          }`,
        ),
        criterion('effluent-blank', 'effluent pH and conductivity near the water blank'),
      ],
      hazards: [
        ...parallelHazard(path),
        'Temperature rise or gas slugs: water has met residual organolithium; hold advised.',
        'If the ratio does not fall: deposit not water-soluble (fluoride, carbonate, polymer); escalation advised, not a repeat.',
        "No verdict on the ratio while two liquids share a segment; afterwards against the water reference, not the solvent's.",
      ],
      basis: [
        `flow limited by: ${cap.limitedBy}; water at ${settings.warmC} °C, the coldest place that is accepted`,
        ...reference.map(
          (r) =>
            `${r.segment}: ${r.predictedDpBar.toFixed(2)} bar predicted at ratio ${r.ratio.toFixed(2)}, clean ${r.cleanDpBar.toFixed(2)} bar, high limit ${r.dpHighBar ?? 'none'} bar`,
        ),
        ...(least === null || kg === null
          ? []
          : [
              `deposit as uniform LiOH film: ${(kg * 1e3).toPrecision(3)} g, at least ${(least.volumeM3 * 1e6).toFixed(0)} mL water, ${settings.dissolveMargin} times that counted; heat of dissolution ${(least.heatJ / 1e3).toPrecision(2)} kJ, ${shown(riseK, 'K', 2)} over the water of this step, at most ${least.riseK.toFixed(0)} K where it leaves saturated`,
            ]),
        ...out.basis,
      ],
    }),
  }
}

/** F4: a fully miscible dry solvent takes the water out again, down to the ppm limit. */
export function dry(stage: Stage): Built {
  const { path, settings, liquids } = stage
  const tempK = kFromC(settings.warmC)
  const at = () => tempK
  const share = waterShareLeft(
    settings.waterPpmLimit,
    settings.drySolventPpm,
    liquids.water.at(tempK).rhoKgM3,
    liquids.drying.at(tempK).rhoKgM3,
  )
  const cap = cappedFlow(path, liquids.drying, at, settings.dpShare)
  const out = washout(path, share, liquids.drying, cap.flowM3S, at, settings.rtd)
  return {
    missing: [...cap.missing, ...out.missing],
    step: finish({
      id: 'F4',
      title: 'Dry solvent: take the water out',
      liquid: `dry ${liquids.drying.name}`,
      flowM3S: cap.flowM3S,
      volumeM3: out.volumeM3,
      minutes: addKnown(pumpMinutes(out.volumeM3, cap.flowM3S), 2 * settings.karlFischerMinutes, settings.confirmMinutes),
      holdPoints: [
        'Before this step: F3 accepted; peroxide test of the solvent in date.',
        `Fully water-miscible and dry (feed below ${settings.drySolventPpm} ppm); not hexane, toluene or 2-methyltetrahydrofuran. Dead legs and sample points too.`,
      ],
      criteria: [
        criterion('karl-fischer-1', `Karl Fischer result of the effluent below ${settings.waterPpmLimit} ppm`),
        criterion('karl-fischer-2', 'a second, consecutive one below the limit'),
      ],
      alsoEnds:
        out.volumeM3 === null
          ? []
          : [
              `volume passed${out.atLeast ? ', at least' : ''} ${(out.volumeM3 * 1e6).toFixed(0)} mL, then two results; a failing or missing result means go on`,
            ],
      hazards: ['Water left behind freezes in F5 and makes LiOH in F6.', ...parallelHazard(path)],
      basis: [
        `flow limited by: ${cap.limitedBy}`,
        `water from pure to ${settings.waterPpmLimit} ppm with solvent of ${settings.drySolventPpm} ppm: ${share.toPrecision(2)} by volume`,
        ...out.basis,
        `two results of ${settings.karlFischerMinutes} min each (assumed)`,
      ],
    }),
  }
}
