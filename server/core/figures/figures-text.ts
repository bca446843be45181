import type { DepositReadings } from '../deposit/readings.ts'
import type { Skid } from '../skid.ts'
import { barFromPa, cFromK, mlMinFromM3s } from '../units.ts'
import type { Given } from './operation.ts'
import { exampleRatio, type SegmentFigures, skidFigures } from './segment-figures.ts'

const show = (value: number | null | undefined, unit: string, digits = 3): string =>
  value === null || value === undefined ? 'not computed' : `${Number(value.toPrecision(digits))} ${unit}`.trim()
const celsius = (kelvin: number | null | undefined): string =>
  kelvin === null || kelvin === undefined ? 'not computed' : `${cFromK(kelvin).toFixed(1)} °C`
const line = (name: string, value: string): string => `  ${name.padEnd(34)}${value}\n`

/** The deposits that one ratio fits, in a line. */
function depositText({ readings }: DepositReadings): string {
  return readings
    .map((r) =>
      r.kind === 'plugged-branch'
        ? 'a plugged branch'
        : r.kind === 'uniform'
          ? `a film of ${show(r.thicknessM === null ? null : r.thicknessM * 1000, 'mm', 2)}`
          : `${show(100 * r.boreRatio, '%', 2)} of the bore left over ${show(100 * (r.lengthShare ?? 0), '%', 2)} of the length`,
    )
    .join('; or ')
}

function block(f: SegmentFigures): string {
  const { dp, heat } = f
  const u =
    heat?.uWM2K == null
      ? 'not computed'
      : `${heat.uWM2K.toFixed(0)} W/(m² K), ${heat.uLowWM2K?.toFixed(0)} to ${heat.uHighWM2K?.toFixed(0)} by a second correlation; ${heat.regime} film ${heat.filmWM2K?.toFixed(0)}`
  const uncertainty =
    f.dpUncertaintyPa === null
      ? 'not computed'
      : `u = ${show(barFromPa(f.dpUncertaintyPa), 'bar', 2)}${dp === null ? '' : `; clean pressure drop is ${(dp.dpPa / f.dpUncertaintyPa).toFixed(0)} u`}`
  return [
    `\n${f.segment}  ${f.title}\n`,
    line(
      'flow, temperature',
      `${show(f.volumeFlowM3S === null ? null : mlMinFromM3s(f.volumeFlowM3S), 'mL/min')}, ${celsius(f.tempK)}`,
    ),
    line('volume, residence time', `${show(f.volumeM3 === null ? null : f.volumeM3 * 1e6, 'mL')}, ${show(f.residenceS, 's')}`),
    line('Re, De', `${show(dp?.re, '')}, ${dp === null ? 'not computed' : dp.de === null ? 'straight' : show(dp.de, '')}`),
    line('clean pressure drop', dp === null ? 'not computed' : show(barFromPa(dp.dpPa), 'bar')),
    line('uncertainty of its taps', uncertainty),
    ...(f.temperatureUK === null
      ? []
      : [line('uncertainty of its temperatures', `u = ${show(f.temperatureUK, 'K', 2)}; ${f.temperatureBasis}`)]),
    line('U (inner area)', u),
    ...(heat?.cooledToK == null ? [] : [line('cools a 20 °C feed to', celsius(heat.cooledToK))]),
    ...(heat?.uNowWM2K == null
      ? []
      : [
          line(
            'U from the readings',
            `${show(heat.uNowWM2K, 'W/(m² K)')}; fouling resistance ${show(heat.foulingM2KW, 'm² K/W', 2)}`,
          ),
        ]),
    ...(heat?.adiabaticRiseK == null
      ? []
      : [
          line('adiabatic rise', show(heat.adiabaticRiseK, 'K')),
          line('MTSR, flow stopped', celsius(heat.mtsrK)),
          line('hot spot, 99 % in the segment', celsius(heat.hotSpotK)),
        ]),
    ...(f.liohM3S === 0
      ? []
      : [
          line('LiOH formed at the stated water', f.liohM3S === null ? 'not computed' : show(f.liohM3S * 1e9 * 3600, 'mm³/h')),
          line('run to dpHigh, a tenth staying', f.runLengthS === null ? 'not computed' : show(f.runLengthS / 3600, 'h', 2)),
          ...(f.reagentLost === null
            ? []
            : [
                line(
                  'organolithium lost to it',
                  `${show(100 * f.reagentLost, '%', 2)}, at worst ${show(200 * f.reagentLost, '%', 2)} (Li2O)`,
                ),
              ]),
        ]),
    ...(f.deposit === null ? [] : [line(`${exampleRatio} times clean would be`, depositText(f.deposit))]),
    ...(f.pluggedRatio === null ? [] : [line('one branch plugged would show', `${show(f.pluggedRatio, '')} times clean`)]),
    ...f.warnings.map((w) => line('  warning', w)),
    ...f.missing.map((m) => line('  not computed', m)),
  ].join('')
}

/** The page that `check-skid` prints for a good file. */
export function derivedPage(skid: Skid, given: Given = {}): string {
  const figures = skidFigures(skid, given)
  const notes = [...new Set(figures.segments.flatMap((f) => [...(f.deposit?.cannotTell ?? []), ...(f.deposit?.couldTell ?? [])]))]
  return [
    `Derived figures of ${skid.skid}, from published correlations; advice for design and review, no safety function.\n`,
    ...figures.segments.map(block),
    notes.length === 0 ? '' : `\nWhat a pressure drop tells of a deposit\n${notes.map((n) => `  - ${n}\n`).join('')}`,
    figures.assumptions.length === 0 ? '' : `\nAssumed\n${figures.assumptions.map((a) => `  - ${a}\n`).join('')}`,
  ].join('')
}
