import { describe, expect, it } from 'vitest'
import { type Arrangement, exchanger } from '../../../server/core/thermal/exchanger.ts'
import { dittusBoelter, gnielinskiTurbulent, hausen, siederTate } from '../../../server/core/thermal/nusselt.ts'
import { adiabaticRise, adiabaticRiseOfFeeds, mixTemperature } from '../../../server/core/thermal/reaction-heat.ts'
import { overallU } from '../../../server/core/thermal/wall.ts'
import { hasShared, sharedCases } from './shared-cases.ts'

/** The own-fixture twins stand in the files beside this one. */
const near = (got: number | null, want: number | null, tolerance: number) => {
  if (want === null) return expect(got).toBe(want)
  expect(Math.abs((got ?? Number.NaN) - want) / Math.max(1e-30, Math.abs(want))).toBeLessThan(tolerance)
}

describe.runIf(hasShared)('shared check values 08 (runs where the folder exists)', () => {
  it('adiabatic rise, 10 cases to 1e-9 and the mixed feeds', () => {
    for (const { i, out } of sharedCases('08_adiabatic_rise.json')) {
      if (i.has('problem')) {
        const feeds = [
          { massFlowKgS: (10e-6 / 60) * 880, cpJKgK: 1720, tempK: 233.15 },
          { massFlowKgS: (4e-6 / 60) * 680, cpJKgK: 2240, tempK: 293.15 },
        ]
        near(mixTemperature(feeds) - 273.15, out.num('mix_temperature_C'), 1e-9)
        near(adiabaticRiseOfFeeds(0.01 / 60, -200e3, feeds), out.num('adiabatic_rise_K'), 1e-9)
        continue
      }
      const rise = adiabaticRise(
        i.num('reaction_enthalpy_kJ_mol') * 1e3,
        i.num('limiting_concentration_after_mixing_mol_L') * 1e3,
        i.num('density_kg_m3'),
        i.num('heat_capacity_J_kgK'),
      )
      near(rise, out.num('adiabatic_rise_K'), 1e-9)
      near(rise * i.num('conversion'), out.num('rise_at_conversion_K'), 1e-9)
    }
  })

  it('exchangers, 16 cases: effectiveness, duty, outlets to 1e-9, LMTD null where the ends meet', () => {
    for (const { i, out } of sharedCases('08_exchanger.json')) {
      if (i.has('problem')) continue
      const got = exchanger({
        arrangement: (i.text('arrangement').startsWith('one') ? 'isothermal' : i.text('arrangement')) as Arrangement,
        hotWK: i.num('hot_flow_kg_s') * i.num('hot_cp'),
        coldWK: i.numOrNull('cold_flow_kg_s') === null ? null : i.num('cold_flow_kg_s') * i.num('cold_cp'),
        hotInK: i.num('hot_in_C'),
        coldInK: i.num('cold_in_C'),
        uaWK: i.num('UA_W_K'),
      })
      near(got.ntu, out.num('ntu'), 1e-9)
      expect(Math.abs(got.capacityRatio - out.num('capacity_ratio'))).toBeLessThan(1e-9)
      near(got.effectiveness, out.num('effectiveness'), 1e-9)
      near(got.dutyW, out.num('duty_W'), 1e-9)
      expect(Math.abs(got.hotOutK - out.num('hot_out_C'))).toBeLessThan(1e-8)
      expect(Math.abs(got.coldOutK - out.num('cold_out_C'))).toBeLessThan(1e-8)
      // a terminal difference of 1.6 µK out of 27 °C keeps only nine digits
      near(got.lmtdK, out.numOrNull('lmtd_K'), 3e-9)
    }
  })

  it('Nusselt numbers, 33 cases to 1e-6', () => {
    for (const { i, out } of sharedCases('08_nusselt.json')) {
      const [re, pr] = [i.num('reynolds'), i.num('prandtl')]
      if (i.has('length_over_diameter')) {
        const gz = (re * pr) / i.num('length_over_diameter')
        near(gz, out.num('graetz'), 1e-6)
        near(hausen(gz), out.num('hausen'), 1e-6)
        near(siederTate(gz), out.num('sieder_tate_no_viscosity_factor'), 1e-6)
      }
      if (out.has('gnielinski_petukhov_friction')) near(gnielinskiTurbulent(re, pr), out.num('gnielinski_petukhov_friction'), 1e-6)
      if (out.has('dittus_boelter_heating')) near(dittusBoelter(re, pr, true), out.num('dittus_boelter_heating'), 1e-6)
      if (out.has('dittus_boelter_cooling')) near(dittusBoelter(re, pr, false), out.num('dittus_boelter_cooling'), 1e-6)
    }
  })

  it('overall coefficients, 10 cases to 1e-9 with their shares', () => {
    for (const { i, out } of sharedCases('08_overall_U.json')) {
      const got = overallU({
        innerDiameterM: i.num('inner_diameter_m'),
        outerDiameterM: i.num('outer_diameter_m'),
        wallConductivityWMK: i.num('wall_conductivity'),
        innerFilmWM2K: i.num('h_inner'),
        outerFilmWM2K: i.num('h_outer'),
        foulingM2KW: i.num('inner_fouling_resistance_m2K_W'),
      })
      near(got.uInnerWM2K, out.num('U_inner_area'), 1e-9)
      near(got.uOuterWM2K, out.num('U_outer_area'), 1e-9)
      near(got.uaPerMWMK, out.num('UA_per_m'), 1e-9)
      near(got.innerShare, out.num('share_inner_film'), 1e-9)
      near(got.wallShare, out.num('share_wall'), 1e-9)
      near(got.outerShare, out.num('share_outer_film'), 1e-9)
    }
  })
})
