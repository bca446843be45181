import {
  andrade,
  type Correlation,
  line,
  perryConductivity,
  perryDensity,
  perryHeatCapacity,
  perryHeatCapacityReduced,
  perryViscosity,
} from './correlation.ts'
import { waterConductivity, waterDensity, waterViscosity } from './water.ts'

/** How far a liquid mixes with water at room temperature: fully; a few per cent ("partial"); hardly ("none", below about 2 %). */
export type WaterMiscibility = 'full' | 'partial' | 'none'

/** A solvent by published figures, SI; temperatures of phase change at 1 atm. */
export interface SolventEntry {
  readonly name: string
  readonly aliases: readonly string[]
  readonly molarMassKgMol: number
  readonly freezingC: number
  readonly boilingC: number
  readonly waterMiscible: WaterMiscibility
  readonly viscosity: Correlation
  readonly density: Correlation
  readonly heatCapacity: Correlation
  readonly conductivity: Correlation
  /** What independent published sources differ by inside the range, %; below -60 °C they differ by about 10 % for every solvent. */
  readonly viscosityErrorPct: number
  readonly source: string
}

const perry = "Perry's Chemical Engineers' Handbook, 8th ed., tables 2-313, 2-32, 2-153, 2-315"

/**
 * The solvents. Correlation coefficients: Perry's Chemical Engineers' Handbook, 8th ed. (tables beside each form in
 * correlation.ts); water: IAPWS and Kell (water.ts), its heat capacity Perry 2-153. Freezing and boiling points: CRC Handbook of
 * Chemistry and Physics, physical constants of organic compounds. Miscibility: common practice. 2-Methyltetrahydrofuran and
 * dimethoxyethane have no open correlation: values from memory, low confidence, viscosity 25 %.
 */
export const solvents: readonly SolventEntry[] = [
  {
    name: 'water',
    aliases: ['H2O'],
    molarMassKgMol: 0.01801528,
    freezingC: 0,
    boilingC: 99.974,
    waterMiscible: 'full',
    viscosity: waterViscosity,
    density: waterDensity,
    heatCapacity: perryHeatCapacity(0.01801528, 276370, -2090.1, 8.125, -0.014116, 9.3701e-6, 273.16, 533.15),
    conductivity: waterConductivity,
    viscosityErrorPct: 1,
    source: "IAPWS SR6-08(2011); Kell 1975; Perry's Chemical Engineers' Handbook, 8th ed., table 2-153",
  },
  {
    name: 'tetrahydrofuran',
    aliases: ['THF'],
    molarMassKgMol: 0.07210572,
    freezingC: -108.44,
    boilingC: 65.97,
    waterMiscible: 'full',
    viscosity: perryViscosity(-10.321, 900.92, -0.069128, 0, 0, 164.65, 373.15),
    density: perryDensity(0.07210572, 1254.3, 0.28084, 540.15, 0.2912, 164.65, 540.15),
    heatCapacity: perryHeatCapacity(0.07210572, 171730, -800.47, 2.8934, -0.0025015, 0, 164.65, 339.12),
    conductivity: perryConductivity(0.19428, -0.000249, 0, 0, 164.65, 339.12),
    viscosityErrorPct: 5,
    source: perry,
  },
  {
    name: 'toluene',
    aliases: ['PhMe'],
    molarMassKgMol: 0.09213842,
    freezingC: -94.95,
    boilingC: 110.63,
    waterMiscible: 'none',
    viscosity: perryViscosity(-226.08, 6805.7, 37.542, -0.060853, 1, 178.18, 383.78),
    density: perryDensity(0.09213842, 879.2, 0.27136, 591.75, 0.29241, 178.18, 591.75),
    heatCapacity: perryHeatCapacity(0.09213842, 140140, -152.3, 0.695, 0, 0, 178.18, 500),
    conductivity: perryConductivity(0.20463, -0.00024252, 0, 0, 178.18, 474.85),
    viscosityErrorPct: 5,
    source: perry,
  },
  {
    name: 'hexane',
    aliases: ['n-hexane'],
    molarMassKgMol: 0.08617536,
    freezingC: -95.31,
    boilingC: 68.72,
    waterMiscible: 'none',
    viscosity: perryViscosity(-6.3276, 640, -0.694, 5.6884e21, -10, 174.65, 406.08),
    density: perryDensity(0.08617536, 708.24, 0.26411, 507.6, 0.27537, 177.83, 507.6),
    heatCapacity: perryHeatCapacity(0.08617536, 172120, -183.78, 0.88734, 0, 0, 177.83, 460),
    conductivity: perryConductivity(0.22492, -0.0003533, 0, 0, 177.83, 370),
    viscosityErrorPct: 7,
    source: perry,
  },
  {
    name: 'heptane',
    aliases: ['n-heptane'],
    molarMassKgMol: 0.10020194,
    freezingC: -90.55,
    boilingC: 98.38,
    waterMiscible: 'none',
    viscosity: perryViscosity(-9.4622, 877.07, -0.23445, 1.4022e22, -10, 180.15, 432.16),
    density: perryDensity(0.10020194, 612.59, 0.26211, 540.2, 0.28141, 182.57, 540.2),
    heatCapacity: perryHeatCapacityReduced(0.10020194, 540.2, [61.26, 314410, 1824.6, -2547.9], 182.57, 520),
    conductivity: perryConductivity(0.215, -0.000303, 0, 0, 182.57, 371.58),
    viscosityErrorPct: 4,
    source: perry,
  },
  {
    name: 'cyclohexane',
    aliases: ['CyH'],
    molarMassKgMol: 0.08415948,
    freezingC: 6.7,
    boilingC: 80.7,
    waterMiscible: 'none',
    viscosity: perryViscosity(-33.763, 2497.2, 3.2236, 0, 0, 279.69, 443.04),
    density: perryDensity(0.08415948, 889.98, 0.27376, 553.8, 0.28571, 279.69, 553.8),
    heatCapacity: perryHeatCapacity(0.08415948, -220600, 3118.3, -9.4216, 0.010687, 0, 279.69, 400),
    conductivity: perryConductivity(0.19813, -0.0002505, 0, 0, 279.69, 353.87),
    viscosityErrorPct: 4,
    source: perry,
  },
  {
    name: 'methanol',
    aliases: ['MeOH'],
    molarMassKgMol: 0.03204186,
    freezingC: -97.53,
    boilingC: 64.54,
    waterMiscible: 'full',
    viscosity: perryViscosity(-25.317, 1789.2, 2.069, 0, 0, 175.47, 337.85),
    density: perryDensity(0.03204186, 2326.7, 0.27073, 512.5, 0.24713, 175.47, 512.5),
    heatCapacity: perryHeatCapacity(0.03204186, 105800, -362.23, 0.9379, 0, 0, 175.47, 400),
    conductivity: perryConductivity(0.2837, -0.000281, 0, 0, 175.47, 337.85),
    viscosityErrorPct: 5,
    source: perry,
  },
  {
    name: 'ethanol',
    aliases: ['EtOH'],
    molarMassKgMol: 0.04606844,
    freezingC: -114.14,
    boilingC: 78.24,
    waterMiscible: 'full',
    viscosity: perryViscosity(7.875, 781.98, -3.0418, 0, 0, 200, 440),
    density: perryDensity(0.04606844, 1628.8, 0.27469, 514, 0.23178, 159.05, 514),
    heatCapacity: perryHeatCapacity(0.04606844, 102640, -139.63, -0.030341, 0.0020386, 0, 159.05, 390),
    conductivity: perryConductivity(0.2468, -0.000264, 0, 0, 159.05, 353.15),
    viscosityErrorPct: 5,
    source: perry,
  },
  {
    name: 'acetone',
    aliases: [],
    molarMassKgMol: 0.05807914,
    freezingC: -94.9,
    boilingC: 56.08,
    waterMiscible: 'full',
    viscosity: perryViscosity(-14.918, 1023.4, 0.5961, 0, 0, 190, 329.44),
    density: perryDensity(0.05807914, 1233.2, 0.25886, 508.2, 0.2913, 178.45, 508.2),
    heatCapacity: perryHeatCapacity(0.05807914, 135600, -177, 0.2837, 0.000689, 0, 178.45, 329.44),
    conductivity: perryConductivity(0.2878, -0.000427, 0, 0, 178.45, 343.15),
    viscosityErrorPct: 6,
    source: perry,
  },
  {
    name: 'methyl-tert-butyl-ether',
    aliases: ['MTBE', 'TBME'],
    molarMassKgMol: 0.08814818,
    freezingC: -108.6,
    boilingC: 55.1,
    waterMiscible: 'partial',
    viscosity: perryViscosity(-6.921, 790.773, -0.654, 0, 0, 164.55, 450),
    density: perryDensity(0.08814818, 928, 0.289, 497.1, 0.286, 164.55, 497.1),
    heatCapacity: perryHeatCapacity(0.08814818, 134300, 94.356, -0.0032, 0.0009795, 0, 164.55, 328.18),
    conductivity: perryConductivity(0.2253, -0.00037273, 1.1728e-7, 0, 164.55, 328.18),
    viscosityErrorPct: 8,
    source: perry,
  },
  {
    name: 'diethyl-ether',
    aliases: ['Et2O', 'ether'],
    molarMassKgMol: 0.0741216,
    freezingC: -116.22,
    boilingC: 34.43,
    waterMiscible: 'partial',
    viscosity: perryViscosity(10.197, -63.8, -3.226, 0, 0, 200, 373.15),
    density: perryDensity(0.0741216, 955.4, 0.26847, 466.7, 0.2814, 156.85, 466.7),
    heatCapacity: perryHeatCapacity(0.0741216, 44400, 1301, -5.5, 0.008763, 0, 156.92, 460),
    conductivity: perryConductivity(0.2495, -0.000407, 0, 0, 156.85, 433.15),
    viscosityErrorPct: 5,
    source: perry,
  },
  {
    name: 'dichloromethane',
    aliases: ['DCM', 'methylene chloride'],
    molarMassKgMol: 0.08493258,
    freezingC: -95,
    boilingC: 39.8,
    waterMiscible: 'none',
    viscosity: perryViscosity(-13.071, 940.03, 0.3733, 0, 0, 208.38, 373.93),
    density: perryDensity(0.08493258, 1389.7, 0.25678, 510, 0.2902, 178.01, 510),
    heatCapacity: perryHeatCapacity(0.08493258, 98968, -62.941, 0.23265, 0, 0, 180, 320),
    conductivity: perryConductivity(0.23847, -0.00033366, 0, 0, 178.01, 325),
    viscosityErrorPct: 3,
    source: perry,
  },
  {
    name: 'ethyl-acetate',
    aliases: ['EtOAc'],
    molarMassKgMol: 0.08810512,
    freezingC: -83.8,
    boilingC: 77.11,
    waterMiscible: 'partial',
    viscosity: perryViscosity(14.354, -154.6, -3.7887, 0, 0, 220, 473.15),
    density: perryDensity(0.08810512, 899.6, 0.25856, 523.3, 0.278, 189.6, 523.3),
    heatCapacity: perryHeatCapacity(0.08810512, 226230, -624.8, 1.472, 0, 0, 189.6, 350.21),
    conductivity: perryConductivity(0.2501, -0.0003563, 0, 0, 189.6, 350.21),
    viscosityErrorPct: 5,
    source: perry,
  },
  {
    name: 'acetonitrile',
    aliases: ['MeCN', 'ACN'],
    molarMassKgMol: 0.04105192,
    freezingC: -44,
    boilingC: 81.6,
    waterMiscible: 'full',
    viscosity: perryViscosity(-10.906, 872.02, 0, 0, 0, 229.32, 436.4),
    density: perryDensity(0.04105192, 1306.4, 0.22597, 545.5, 0.28678, 229.32, 545.5),
    heatCapacity: perryHeatCapacity(0.04105192, 97582, -122.2, 0.34085, 0, 0, 229.32, 354.75),
    conductivity: perryConductivity(0.33192, -0.00043243, 0, 0, 229.32, 349.32),
    viscosityErrorPct: 6,
    source: perry,
  },
  {
    name: '1,4-dioxane',
    aliases: ['dioxane'],
    molarMassKgMol: 0.08810512,
    freezingC: 11.85,
    boilingC: 101.2,
    waterMiscible: 'full',
    viscosity: perryViscosity(-46.166, 3086.2, 5.104, 0, 0, 284.95, 374.65),
    density: perryDensity(0.08810512, 1181.9, 0.2813, 587, 0.3047, 284.95, 587),
    heatCapacity: perryHeatCapacity(0.08810512, 956860, -5559.9, 9.6124, 0, 0, 284.95, 374.47),
    conductivity: perryConductivity(0.3027, -0.0004827, 0, 0, 284.95, 374.47),
    viscosityErrorPct: 5,
    source: perry,
  },
  {
    name: 'dimethylformamide',
    aliases: ['DMF', 'N,N-dimethylformamide'],
    molarMassKgMol: 0.07309378,
    freezingC: -60.43,
    boilingC: 152.8,
    waterMiscible: 'full',
    viscosity: perryViscosity(-20.425, 1515.5, 1.4444, 0, 0, 240, 425.15),
    density: perryDensity(0.07309378, 896.15, 0.23478, 649.6, 0.28091, 212.72, 649.6),
    heatCapacity: perryHeatCapacity(0.07309378, 147900, -106, 0.384, 0, 0, 273.82, 466.44),
    conductivity: perryConductivity(0.26, -0.000255, 0, 0, 250, 425.15),
    viscosityErrorPct: 8,
    source: perry,
  },
  {
    name: '2-methyltetrahydrofuran',
    aliases: ['2-MeTHF', 'MeTHF'],
    molarMassKgMol: 0.0861323,
    freezingC: -136,
    boilingC: 80,
    waterMiscible: 'partial',
    viscosity: andrade(0.46e-3, 298.15, 888, 203.15, 333.15),
    density: line(854, 293.15, -1, 143.15, 393.15),
    heatCapacity: line(1820, 298.15, 3, 203.15, 343.15),
    conductivity: line(0.12, 298.15, -0.00025, 203.15, 343.15),
    viscosityErrorPct: 25,
    source: 'from memory, low confidence: 0.46 mPa s at 25 °C (0.46 to 0.60 is quoted), 1.85 at -70 °C; 854 kg/m3 at 20 °C',
  },
  {
    name: 'dimethoxyethane',
    aliases: ['DME', '1,2-dimethoxyethane', 'glyme'],
    molarMassKgMol: 0.090121,
    freezingC: -58,
    boilingC: 84.5,
    waterMiscible: 'full',
    viscosity: andrade(0.455e-3, 298.15, 900, 233.15, 343.15),
    density: line(868, 293.15, -1.05, 173.15, 393.15),
    heatCapacity: line(2120, 298.15, 3, 233.15, 343.15),
    conductivity: line(0.14, 298.15, -0.0002, 233.15, 343.15),
    viscosityErrorPct: 25,
    source:
      'from memory, low confidence: 0.455 mPa s at 25 °C (0.41 to 0.46 is quoted), 868 kg/m3 at 20 °C, freezing -58 to -69 °C',
  },
]

const key = (name: string): string => name.toLowerCase().replace(/[\s_-]+/g, '-')
const byName = new Map(solvents.flatMap((s) => [s.name, ...s.aliases].map((n) => [key(n), s] as const)))

/** Every name that is taken, full ones first. */
export const solventWords: readonly string[] = [...solvents.map((s) => s.name), ...solvents.flatMap((s) => s.aliases)]

/** The solvent by its full or short name (case, spaces and hyphens do not matter); null when there is none. */
export function solventNamed(name: string): SolventEntry | null {
  return byName.get(key(name.trim())) ?? null
}
