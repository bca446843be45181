import { effectiveness, lmtd } from '../thermal/exchanger.ts'
import { dittusBoelter, gnielinskiLaminar, gnielinskiTurbulent, hausen } from '../thermal/nusselt.ts'
import { integrate } from '../thermal/ode.ts'
import { adiabaticRise, adiabaticRiseOfFeeds, mixTemperature } from '../thermal/reaction-heat.ts'
import { overallU } from '../thermal/wall.ts'
import type { WorkedExample } from './worked-example.ts'

const subject = 'heat'
const incropera = 'Incropera & DeWitt, example 11.1, counterflow oil cooler (from memory)'
const oilW = 0.1 * 2131 * 40
const waterOutC = 30 + oilW / (0.2 * 4178)
const oilU = () =>
  overallU({
    innerDiameterM: 0.025,
    outerDiameterM: 0.025,
    wallConductivityWMK: 400,
    innerFilmWM2K: 2250,
    outerFilmWM2K: 38.4,
    foulingM2KW: 0,
  }).uInnerWM2K
const oilLmtd = () => lmtd(100 - waterOutC, 60 - 30) ?? Number.NaN
const feeds = [
  { massFlowKgS: (10e-6 / 60) * 880, cpJKgK: 1720, tempK: 233.15 },
  { massFlowKgS: (4e-6 / 60) * 680, cpJKgK: 2240, tempK: 293.15 },
]
const hand = 'energy balance by hand'

export const heatExamples: readonly WorkedExample[] = [
  {
    subject,
    name: 'oil cooler: mean temperature difference',
    source: incropera,
    printed: 43.2,
    unit: 'K',
    tolerance: 0.002,
    compute: oilLmtd,
  },
  {
    subject,
    name: 'oil cooler: overall coefficient',
    source: incropera,
    printed: 37.8,
    unit: 'W/(m² K)',
    tolerance: 0.002,
    compute: oilU,
  },
  {
    subject,
    name: 'oil cooler: length',
    source: incropera,
    printed: 66.5,
    unit: 'm',
    tolerance: 0.002,
    compute: () => oilW / (oilU() * oilLmtd() * Math.PI * 0.025),
  },
  {
    subject,
    name: 'effectiveness, counterflow, NTU 1, Cr 0.5',
    source: 'Kays & London, Compact Heat Exchangers, table (from memory)',
    printed: 0.565,
    unit: '',
    tolerance: 0.002,
    compute: () => effectiveness('counterflow', 1, 0.5),
  },
  {
    subject,
    name: 'effectiveness, parallel, NTU 2, Cr 0.5',
    source: 'Kays & London, Compact Heat Exchangers, table (from memory)',
    printed: 0.633,
    unit: '',
    tolerance: 0.002,
    compute: () => effectiveness('parallel', 2, 0.5),
  },
  {
    subject,
    name: 'laminar Nusselt number far down a tube, wall at one temperature',
    source: 'Graetz, 3.66 in every textbook',
    printed: 3.66,
    unit: '',
    tolerance: 0.003,
    compute: () => gnielinskiLaminar(1e-9),
  },
  {
    subject,
    name: 'laminar Nusselt number (Hausen), Gz 35',
    source: 'closed correlation, evaluated independently',
    printed: 5.29726064358,
    unit: '',
    tolerance: 1e-6,
    compute: () => hausen(35),
  },
  {
    subject,
    name: 'turbulent Nusselt number (Gnielinski), Re 1e4, Pr 7',
    source: 'closed correlation, evaluated independently',
    printed: 79.4926450941,
    unit: '',
    tolerance: 1e-6,
    compute: () => gnielinskiTurbulent(1e4, 7),
  },
  {
    subject,
    name: 'turbulent Nusselt number (Dittus-Boelter, heated), Re 1e4, Pr 7',
    source: 'closed correlation, evaluated independently',
    printed: 79.3902285175,
    unit: '',
    tolerance: 1e-6,
    compute: () => dittusBoelter(1e4, 7, true),
  },
  {
    subject,
    name: 'organolithium 1 mol/L in THF against water: adiabatic rise',
    source: 'hand computation, about 150 K at −220 kJ/mol',
    printed: 150,
    unit: 'K',
    tolerance: 0.05,
    compute: () => adiabaticRise(-220e3, 1000, 889, 1720),
  },
  {
    subject,
    name: 'two feeds mixed, −40 and 20 °C: temperature',
    source: hand,
    printed: 273.15 - 22.7796201387,
    unit: 'K',
    tolerance: 1e-9,
    compute: () => mixTemperature(feeds),
  },
  {
    subject,
    name: 'the same, 10 mmol/min at −200 kJ/mol: adiabatic rise',
    source: hand,
    printed: 94.2116370214,
    unit: 'K',
    tolerance: 1e-9,
    compute: () => adiabaticRiseOfFeeds(0.01 / 60, -200e3, feeds),
  },
  {
    subject,
    name: 'integrator: e from dy/dx = y, 0 to 1',
    source: 'closed solution',
    printed: Math.E,
    unit: '',
    tolerance: 1e-8,
    compute: () => integrate((_x, y) => [y[0] ?? 0], 0, [1], 1, { relTol: 1e-10 }).at(-1)?.y[0] ?? Number.NaN,
  },
]
