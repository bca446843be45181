import { segmentKinds } from '../core/skid.ts'
import { quantities, type Unit, units } from '../core/units.ts'
import { alarmsShape, disturbancesShape, suppressionShape } from './alarm-shape.ts'
import { fluidShape } from './fluid-shape.ts'
import { logShape } from './log-shape.ts'
import { meant } from './nearest.ts'
import { outletShape } from './outlet-shape.ts'
import { choice, group, id, list, number, type Read, text } from './readers.ts'
import { zoneShape } from './zone-shape.ts'

const mm = (above = 0) => number({ above, max: 1000, unit: 'millimetres' })
const bar = number({ above: 0, max: 10_000, unit: 'bar' })
const celsius = number({ min: -273.15, max: 1000, unit: 'degrees Celsius' })
const molL = number({ above: 0, max: 100, unit: 'mol/L' })

/** What people write for a unit, by what the file calls it. */
const otherUnits: Readonly<Record<string, Unit>> = {
  '°c': 'degC',
  c: 'degC',
  celsius: 'degC',
  '°f': 'degF',
  f: 'degF',
  fahrenheit: 'degF',
  kelvin: 'K',
  barg: 'bar',
  'bar(g)': 'bar',
  'kg/hr': 'kg/h',
  'l/hr': 'L/h',
  percent: '%',
  pct: '%',
  '1/min': 'rpm',
  'kg/m³': 'kg/m3',
  'kg/m^3': 'kg/m3',
}
const unitNames = Object.keys(units) as Unit[]
const unit = text<Unit>(`one of ${unitNames.join(', ')}`, (value) => {
  if ((unitNames as readonly string[]).includes(value)) return null
  const known = otherUnits[value.toLowerCase()]
  return { hint: known === undefined ? meant(value, unitNames) : `did you mean '${known}'?` }
})

const tagName = text('the name of a tag', (value) =>
  /^ambient$/i.test(value)
    ? { hint: "'ambient' stands for an open outlet" }
    : value.length > 80
      ? { hint: 'at most 80 characters' }
      : /[\p{Cc},;"]/u.test(value)
        ? { hint: 'without comma, semicolon, quote or control character' }
        : null,
)
const tagRef = text('a tag')
const streamRef = text('the id of a stream')

const tag = group(
  {
    tag: tagName,
    column: text('a column of the log'),
    quantity: choice(quantities),
    unit,
    range: list(number({ min: -1e12, max: 1e12 }), { min: 2, max: 2, name: 'numbers, low and high' }),
    accuracyPct: number({ above: 0, max: 100, unit: '% of span' }),
    signal: choice(['4-20mA']),
    sensor: text('the kind of sensor, such as K or Pt100'),
    burnout: choice(['high', 'low']),
    setpointFor: tagRef,
  },
  { required: ['tag', 'quantity'] },
)

const stream = group(
  {
    id,
    title: text(),
    flowTag: tagRef,
    fluid: fluidShape,
    waterPpm: number({ min: 0, max: 1e6, unit: 'ppm by mass' }),
    reagent: group({ name: text('the name of the reagent'), concentrationMolL: molL }, { required: ['name', 'concentrationMolL'] }),
  },
  { required: ['id', 'flowTag'] },
)

/** Keys beyond the contract's: `widthMm` with `depthMm` for a rectangular channel, `coreMm` for a ring, `bends`. */
const channel = group({
  diameterMm: mm(),
  widthMm: mm(),
  depthMm: mm(),
  coreMm: mm(),
  bends: number({ min: 0, max: 100_000, whole: true }),
  lengthM: number({ above: 0, max: 10_000, unit: 'metres' }),
  parallel: number({ min: 1, max: 10_000, whole: true }),
  roughnessUm: number({ min: 0, max: 10_000, unit: 'micrometres' }),
  wallMm: mm(),
  coilDiameterMm: number({ above: 0, max: 100_000, unit: 'millimetres' }),
  heightM: number({ min: -1000, max: 1000, unit: 'metres, positive when the outlet is higher' }),
  wallConductivityWMK: number({ above: 0, max: 5000, unit: 'W/(m K)' }),
  outerFilmWM2K: number({ above: 0, max: 1e6, unit: 'W/(m2 K)' }),
})

/** The limits that settings may change too, each with what it may be. */
export const limitFields = {
  dpHighBar: bar,
  dpHighHighBar: bar,
  pressureHighBar: bar,
  temperatureHighC: celsius,
  temperatureHighHighC: celsius,
  temperatureLowC: celsius,
  flowLow: number({ min: 0, max: 1e9, unit: 'in the unit of the flow tag' }),
}

const limits = group({
  ...limitFields,
  feedRatio: group(
    {
      of: list(streamRef, { min: 2, max: 2, name: 'streams' }),
      low: number({ min: 0, max: 1e6, unit: 'mol/mol' }),
      high: number({ above: 0, max: 1e6, unit: 'mol/mol' }),
    },
    { required: ['of', 'low', 'high'] },
  ),
})

const segment = group(
  {
    id,
    title: text(),
    kind: choice(segmentKinds),
    streams: list(streamRef, { min: 1, name: 'streams' }),
    pressureIn: tagRef,
    pressureOut: outletShape,
    dpTag: tagRef,
    temperatures: list(tagRef, { name: 'tags, inlet first' }),
    coolantTemperature: tagRef,
    channel,
    volumeMl: number({ above: 0, max: 1e9, unit: 'millilitres' }),
    warmUpKPerMin: number({ above: 0, max: 1000, unit: 'K/min' }),
    limits,
    reaction: group(
      {
        limitingStream: streamRef,
        concentrationMolL: molL,
        enthalpyKJMol: number({ min: -5000, max: 5000, unit: 'kJ/mol, negative when heat is released' }),
      },
      { required: ['limitingStream', 'concentrationMolL', 'enthalpyKJMol'] },
    ),
  },
  { required: ['id', 'kind', 'streams'] },
)

/** The promise, in a skid file and in settings. */
export const detectionShape = group({
  falseAlarmDays: number({ above: 0, max: 3650, unit: 'days' }),
  riseToFindPct: number({ above: 0, max: 100, unit: '%' }),
})

/** The whole skid file, key by key. What holds between keys is in references.ts and consistency.ts. */
export const skidShape = group(
  {
    skid: id,
    title: text(),
    timeZone: zoneShape,
    scanSeconds: number({ min: 0.1, max: 60, unit: 'seconds' }),
    lateSeconds: number({ min: 0, max: 86_400, unit: 'seconds' }),
    phaseColumn: text('a column of the log'),
    log: logShape,
    detection: detectionShape,
    tags: list(tag, { min: 1, name: 'tags' }),
    // A file of tags alone is a beginning: its log is judged and kept, nothing is computed from it.
    streams: list(stream, { min: 0, name: 'streams' }),
    segments: list(segment, { min: 0, name: 'segments' }),
    alarms: alarmsShape,
    suppression: suppressionShape,
    disturbances: disturbancesShape,
  },
  { required: ['skid', 'tags', 'streams', 'segments'] },
)

export type SkidFile = Read<typeof skidShape>
export type TagFile = Read<typeof tag>
export type StreamFile = Read<typeof stream>
export type SegmentFile = Read<typeof segment>
