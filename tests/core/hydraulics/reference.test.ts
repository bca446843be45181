import { existsSync, readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { bendLoss, expansionLoss } from '../../../server/core/hydraulics/bends.ts'
import { type ChannelGeometry, roundArea } from '../../../server/core/hydraulics/channel.ts'
import { cleanDp } from '../../../server/core/hydraulics/clean-dp.ts'
import {
  coilCriticalReynolds,
  coilFrictionFactor,
  deanNumber,
  schmidtCoilRatio,
  whiteCoilRatio,
} from '../../../server/core/hydraulics/curvature.ts'
import { colebrook, darcyFriction } from '../../../server/core/hydraulics/friction.ts'

const folder = new URL('../../../../shared/reference/', import.meta.url)
type Row = Record<string, number | string | null>
const load = (name: string) => JSON.parse(readFileSync(new URL(name, folder), 'utf8')).cases as { in: Row; out: Row }[]
const apart = (got: number, wanted: unknown): number => Math.abs(got / (wanted as number) - 1)

describe.runIf(existsSync(folder))(
  'shared reference values of tubes (their twins that always run: friction, curvature, clean-dp tests)',
  () => {
    it('friction factors: Colebrook 1e-9, Churchill 1e-9, all of 06_friction_factor', () => {
      for (const { in: i, out } of load('06_friction_factor.json')) {
        const [re, e] = [i['reynolds'] as number, i['relative_roughness'] as number]
        if (out['churchill'] != null) expect(apart(darcyFriction(re, e), out['churchill']), `Re ${re} e ${e}`).toBeLessThan(1e-9)
        if (out['colebrook'] != null) expect(apart(colebrook(re, e), out['colebrook']), `Re ${re} e ${e}`).toBeLessThan(1e-9)
      }
    })

    it('coils: White, Dean, critical Re 1e-9; Schmidt turbulent over Colebrook 1e-6 below Re 20000 and above 24200, all of 06_coil_friction', () => {
      for (const { in: i, out } of load('06_coil_friction.json')) {
        const [re, d, coil] = [i['reynolds'] as number, i['tube_diameter_m'] as number, i['coil_diameter_m'] as number]
        expect(apart(deanNumber(re, d, coil), out['dean'])).toBeLessThan(1e-9)
        expect(apart(coilCriticalReynolds(d, coil), out['critical_reynolds_schmidt'])).toBeLessThan(1e-9)
        if (out['white'] != null)
          expect(apart((64 / re) * whiteCoilRatio(deanNumber(re, d, coil)), out['white'])).toBeLessThan(1e-9)
        if (out['schmidt_turbulent'] != null && (re <= 20000 || re >= 24200))
          expect(apart(colebrook(re, 0) * schmidtCoilRatio(re, d, coil), out['schmidt_turbulent']), `Re ${re}`).toBeLessThan(1e-6)
      }
    })

    it('fittings: Hooper and Borda and Carnot to 1e-6, all of 06_fittings', () => {
      let seen = 0
      for (const { in: i, out } of load('06_fittings.json')) {
        if (out['hooper2k_K1_800_Kinf_0.25'] != null) {
          expect(
            apart(bendLoss(i['reynolds'] as number, i['diameter_m'] as number), out['hooper2k_K1_800_Kinf_0.25']),
          ).toBeLessThan(1e-6)
          seen++
        }
        if (i['fitting'] === 'sudden expansion') {
          expect(apart(expansionLoss(i['small_over_large_diameter'] as number, 1), out['borda_carnot'])).toBeLessThan(1e-6)
          seen++
        }
      }
      expect(seen).toBeGreaterThan(15)
    })

    it('whole tubes with bends, entrance and exit: laminar 0.2 %, turbulent straight 5 %, smooth turbulent coil 5 % outside its transition, all of 06_tube_pressure_drop', () => {
      let checked = 0
      for (const { in: i, out } of load('06_tube_pressure_drop.json')) {
        const diameterM = i['diameter_m'] as number
        const channel: ChannelGeometry = {
          diameterM,
          areaM2: roundArea(diameterM),
          lengthM: i['length_m'] as number,
          parallel: 1,
          roughnessM: i['roughness_m'] as number,
          coilDiameterM: i['coil_diameter_m'] as number | null,
          heightM: 0,
          bends: i['bends_90_hooper_K1_800_Kinf_0.25'] as number,
          laminarFactor: 1,
        }
        const rho = i['density_kg_m3'] as number
        const dp = cleanDp(channel, ((i['flow_L_min'] as number) / 60000) * rho, rho, i['viscosity_Pa_s'] as number, { lossK: 1.5 })
        expect(apart(dp.re, out['reynolds'])).toBeLessThan(1e-9)
        expect(apart(dp.bendPa, out['dp_fittings'])).toBeLessThan(1e-6)
        if (out['regime'] === 'transition') {
          expect(dp.uncertain).toBe(true)
          continue
        }
        const coil = channel.coilDiameterM
        if (coil !== null && out['regime'] === 'turbulent') {
          if (dp.uncertain) continue
          const smooth = cleanDp(
            { ...channel, roughnessM: 0 },
            ((i['flow_L_min'] as number) / 60000) * rho,
            rho,
            i['viscosity_Pa_s'] as number,
          )
          expect(apart(smooth.frictionPa, out['dp_tube']), JSON.stringify(i)).toBeLessThan(0.05)
        } else
          expect(apart(dp.frictionPa, out['dp_tube']), JSON.stringify(i)).toBeLessThan(out['regime'] === 'laminar' ? 0.002 : 0.05)
        checked++
      }
      expect(checked).toBeGreaterThan(30)
    })

    it('worked examples of 06_textbook: f 2 % printed and 1e-4 recomputed', () => {
      const [iron] = load('06_textbook.json')
      expect(
        apart(colebrook(iron!.in['reynolds'] as number, iron!.in['relative_roughness'] as number), iron!.out['f_colebrook']),
      ).toBeLessThan(1e-4)
      expect(apart(coilFrictionFactor(100, 0, 0.001, 1), 0.64)).toBeLessThan(1e-12)
    })
  },
)
