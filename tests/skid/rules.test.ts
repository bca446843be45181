import { expect, it } from 'vitest'
import { checkSkid } from '../../server/skid/check.ts'
import { base, broken, marked } from './base.ts'

/** What is replaced in the base, by what (§ marks the place to be named), and what must be said: found, expected, mend (null: none); a second problem it brings. */
type Rule = readonly [from: string, to: string, found: string, expected: string, hint: string | null, alsoFound?: string]

// biome-ignore format: one rule a line
const rules: readonly Rule[] = [
  // keys
  ['title: Plover', '§titel: Plover', "unknown key 'titel'", 'one of skid, title', "did you mean 'title'?"],
  ['timeZone:', '§time_zone:', "unknown key 'time_zone'", 'timeZone', "did you mean 'timeZone'?"],
  ['tags:\n', '§Tags:\n', "unknown key 'Tags'", 'tags', "did you mean 'tags'?"],
  ['column: inlet', '§colum: inlet', "unknown key 'colum' in tags[0]", 'column', "did you mean 'column'?"],
  ['dpHighBar: 6', '§dp_high_bar: 6', "unknown key 'dp_high_bar' in limits", 'dpHighBar', "did you mean 'dpHighBar'?"],
  ['    kind: filter', '    kind: filter\n    §wallMm: 2', "unknown key 'wallMm' in segments[1]", 'one of id', "'wallMm' belongs under 'channel'"],
  ['detection: {', 'detection: { §zebra: 1,', "unknown key 'zebra' in detection", 'falseAlarmDays', null],
  ['    volumeMl: 60', '    volumeMl: 60\n    §volumeMl: 61', "'volumeMl' stands twice", 'each key once', 'the first is on line 43; remove one'],
  ['  - { tag: PT-1, column: inlet, quantity: pressure,', '  - §{ tag: PT-1, column: inlet,', "'quantity' is missing in tags[0]", 'one of pressure', null],
  ['skid: plover\ntitle', '§title', "'skid' is missing", "letters, digits and '-'", null],
  // types
  ['skid: plover', 'skid: §plover 4', "skid is the text 'plover 4'", "letters, digits and '-'", "for example 'plover-4'"],
  ['title: Plover bench skid', 'title: §[a]', 'title is a list', 'a text', 'one value, without brackets or dashes'],
  ['title: Plover bench skid', 'title: §{ a: 1 }', 'title is a group of keys', 'a text', null],
  ['title: Plover bench skid', 'title: §""', "title is the text ''", 'a text', null],
  ['scanSeconds: 1', 'scanSeconds: §"1"', "scanSeconds is the text '1'", 'a number from 0.1 to 60 (seconds)', 'without quotes: 1'],
  ['scanSeconds: 1', 'scanSeconds: §010', 'scanSeconds is 010', 'a number from 0.1 to 60', 'without leading zeros'],
  ['scanSeconds: 1', 'scanSeconds: §0x10', 'scanSeconds is 0x10', 'a number from 0.1 to 60', null],
  ['scanSeconds: 1', 'scanSeconds: §.nan', 'scanSeconds is .nan', 'a number from 0.1 to 60', null],
  ['scanSeconds: 1', 'scanSeconds: §1,5', "scanSeconds is the text '1,5'", 'a number from 0.1 to 60', 'with a decimal point: 1.5'],
  ['scanSeconds: 1', 'scanSeconds: §2 s', "scanSeconds is the text '2 s'", 'a number', 'the number alone (2)'],
  ['scanSeconds: 1', 'scanSeconds: §true', 'scanSeconds is true', 'a number', null],
  ['scanSeconds: 1', 'scanSeconds: §0.05', 'scanSeconds is 0.05', 'a number from 0.1 to 60', null],
  ['scanSeconds: 1', 'scanSeconds: §61', 'scanSeconds is 61', 'a number from 0.1 to 60', null],
  ['lateSeconds: 2', 'lateSeconds: §-1', 'lateSeconds is -1', 'a number from 0 to', null],
  ['volumeMl: 60', 'volumeMl: §1e999', 'volumeMl is 1e999', 'a number above 0', null],
  ['parallel: 2', 'parallel: §1.5', 'parallel is 1.5', 'a whole number from 1', null],
  ['temperatures: [TT-1]', 'temperatures: §TT-1', "temperatures is the text 'TT-1'", 'a list of tags', 'in brackets'],
  ['range: [0, 25], accuracyPct', 'range: §[25], accuracyPct', 'range has 1 entries', 'a list of 2 numbers', null],
  ['    channel: {', '    channel: §5 #', 'channel is 5', 'a group with keys diameterMm', null],
  // zone, phases, promise
  ['Europe/Amsterdam', '§Europe/Amsterdm', 'timeZone is', 'IANA', "did you mean 'Europe/Amsterdam'?"],
  ['Europe/Amsterdam', '§Amsterdam', 'timeZone is', 'IANA', "did you mean 'Europe/Amsterdam'?"],
  ['Europe/Amsterdam', '§+01:00', 'timeZone is', 'IANA', null],
  ['falseAlarmDays: 30', 'falseAlarmDays: §0', 'falseAlarmDays is 0', 'a number above 0', null],
  ['riseToFindPct: 5', 'riseToFindPct: §101', 'riseToFindPct is 101', 'up to 100', null],
  // log
  ['dd/MM/yyyy HH.mm.ss', '§dd/mm/yyyy HH.mm.ss', 'timeFormat is', 'iso, epoch-s', "'MM' is the month, 'mm' the minute"],
  ['dd/MM/yyyy HH.mm.ss', '§DD/MM/YYYY HH.mm.ss', 'timeFormat is', 'pattern', "'dd' for 'DD'"],
  ['dd/MM/yyyy HH.mm.ss', '§"%Y-%m-%d"', 'timeFormat is', 'pattern', 'letters without %'],
  ['dd/MM/yyyy HH.mm.ss', '[iso, §rfc]', 'timeFormat[1] is', 'pattern', "'r' is no field"],
  ['dd/MM/yyyy HH.mm.ss', '§hh:mm:ss', 'timeFormat is', 'pattern', "'hh' is the 12-hour clock"],
  ['dd/MM/yyyy HH.mm.ss', '§MM/yyyy HH:mm', 'timeFormat is', 'pattern', 'year, month and day, or none'],
  ['time: [Date, Time]', 'time: §[a, b, c]', 'time has 3 entries', 'at least 1', null],
  ['time: [Date, Time]', 'time: §[Date, Date]', 'both time columns', 'a date column and a time column', null],
  ['missing: [-200]', 'missing: §-200', 'missing is -200', 'a list of numbers', 'in brackets'],
  ['missing: [-200]', 'missing: [§none]', "missing[0] is the text 'none'", 'a number', null],
  ['log:\n  time: [Date, Time]\n  timeFormat: dd/MM/yyyy HH.mm.ss\n  missing: [-200]', 'log: [{ time: t }, { files: "*.csv" }, §{ time: u }]', 'a second log entry for every file', "'files' on every entry but one", 'add files'],
  ['log:\n  time: [Date, Time]\n  timeFormat: dd/MM/yyyy HH.mm.ss\n  missing: [-200]', 'log: [{ files: "*.csv" }, { files: §"*.csv" }]', "files '*.csv' stands twice", 'each pattern once', null],
  // tags
  ['tag: SP-9', 'tag: §PT-1', "tag 'PT-1' stands twice", 'each tag once', 'rename or remove one'],
  ['tag: PT-2,', 'tag: PT-2, column: §inlet,', "column 'inlet' is already PT-1", 'a column of its own', null],
  ['tag: PT-2,', 'tag: PT-2, column: §Date,', "column 'Date' is already the time", 'a column of its own', null],
  ['tag: PT-2,', 'tag: PT-2, column: §phase,', "column 'phase' is the phase", 'a column of its own', null],
  ['tag: SP-9,', 'tag: §"a,b",', "tag is the text 'a,b'", 'the name of a tag', 'without comma'],
  ['quantity: massFlow', 'quantity: §massflow', "quantity is the text 'massflow'", 'one of pressure', "did you mean 'massFlow'?"],
  ['unit: kg/h', 'unit: §mL/min', "unit 'mL/min' does not fit massFlow", 'one of kg/h, g/min, mA for massFlow', null],
  ['unit: mL/min', 'unit: §ml/min', "unit is the text 'ml/min'", 'one of Pa', "did you mean 'mL/min'?"],
  ['unit: degC', 'unit: §°C', "unit is the text '°C'", 'one of Pa', "did you mean 'degC'?"],
  ['quantity: setpoint, setpointFor: TT-9', 'quantity: text, unit: §bar', "unit 'bar' does not fit text", 'no unit for text', 'remove the unit'],
  ['- { tag: FT-1, quantity: massFlow, unit: kg/h,', '- §{ tag: FT-1, quantity: massFlow,', 'FT-1 has no unit', 'unit: one of kg/h', null],
  ['unit: mbar, range: [0, 2500]', 'unit: §mA', 'unit mA without a range', 'at 4 and 20 mA', 'add range: [low, high]'],
  ['range: [0, 2500]', 'range: §[2500, 0]', 'range runs from 2500 to 0', 'low below high', '[0, 2500]'],
  ['accuracyPct: 0.1', 'accuracyPct: §0', 'accuracyPct is 0', 'a number above 0 up to 100', null],
  ['range: [0, 2500]', 'signal: §0-20mA', "signal is the text '0-20mA'", 'one of 4-20mA', "did you mean '4-20mA'?"],
  ['burnout: high', 'burnout: §up', "burnout is the text 'up'", 'one of high, low', null],
  ['setpointFor: TT-9', 'setpointFor: §TT-8', "setpointFor names 'TT-8', which is no tag", 'the tag whose setpoint', 'did you mean'],
  ['setpointFor: TT-9', 'unit: degC, setpointFor: §SP-9', "setpointFor names 'SP-9', itself", 'the tag whose setpoint', null],
  // streams
  ['  - id: C\n', '  - id: §A\n', "stream 'A' stands twice", 'each stream once', 'rename'],
  ['flowTag: FT-1', 'flowTag: §FT-7', "flowTag names 'FT-7', which is no tag", 'a tag of quantity massFlow or volumeFlow', "did you mean 'FT-1'?"],
  ['flowTag: FT-1', 'flowTag: §PT-1', "flowTag names 'PT-1', which measures pressure", 'massFlow or volumeFlow', null],
  ['solvent: THF', 'solvent: §tetrahydrofurane', 'solvent is', 'one of water', "did you mean 'tetrahydrofuran'?"],
  ['solvent: THF', 'solvent: §mercury', 'solvent is', 'one of water', 'or give densityKgM3'],
  ['{ solvent: THF }', '§{}', 'fluid names no liquid', 'a solvent, or a mixture', 'for example'],
  ['{ solvent: THF }', '§{ solvent: THF, densityKgM3: 900, viscosityMPaS: [[0, 1]] }', 'fluid gives solvent as well as densityKgM3', 'a solvent, or a mixture', 'keep one'],
  ['fluid: { mixture: [{ solvent: hexane, massFraction: 0.7 }', 'fluid: { mixture: §[{ solvent: hexane, massFraction: 0.6 }', 'the mass fractions sum to 0.9', 'a sum of 1 within 0.001', null],
  ['solvent: toluene, massFraction', 'solvent: §n-hexane, massFraction', 'hexane stands twice', 'each solvent once', 'add the fractions up'],
  ['[20, 0.85]', '[§-30, 0.85]', 'at -30 °C after -20 °C', 'rising temperatures', 'sort the points'],
  ['[20, 0.85]', '[20, §0]', 'a viscosity of 0 mPa s', 'a number above 0', null],
  ['viscosityMPaS: [[-20, 1.6], [20, 0.85]]', 'viscosityMPaS: §[]', 'viscosityMPaS has 0 entries', 'at least 1', null],
  ['densityKgM3: 940', 'densityKgM3: §0.94', 'densityKgM3 is 0.94', '1 g/mL is 1000', null],
  ['densityKgM3: 940, viscosityMPaS: [[-20, 1.6], [20, 0.85]]', 'densityKgM3: §940', 'densityKgM3 without viscosityMPaS', 'both, or a solvent', 'add viscosityMPaS'],
  ['waterPpm: 60', 'waterPpm: §-1', 'waterPpm is -1', 'ppm by mass', null],
  ['concentrationMolL: 2.3', 'concentrationMolL: §0', 'concentrationMolL is 0', 'mol/L', null],
  // segments
  ['  - id: F1', '  - id: §R1', "segment 'R1' stands twice", 'each segment once', 'rename'],
  ['kind: filter', 'kind: §filtr', "kind is the text 'filtr'", 'one of precooler, mixer', "did you mean 'filter'?"],
  ['streams: [A, B]\n    dpTag', 'streams: [A, §Z]\n    dpTag', "streams[1] names 'Z', which is no stream", 'one of A, B, C', null],
  ['streams: [A, B]\n    dpTag', 'streams: [A, §A]\n    dpTag', "stream 'A' stands twice", 'each stream once', 'rename or remove'],
  ['streams: [A, B]\n    dpTag', 'streams: §[]\n    dpTag', 'streams has 0 entries', 'at least 1', null],
  ['    dpTag: PDT-3', '    dpTag: PDT-3\n    pressureIn: §PT-1', 'segment F1 has dpTag and pressureIn', 'dpTag alone', 'remove one of them'],
  ['pressureOut: PT-2', 'pressureOut: §PT-1', "pressureIn and pressureOut are both 'PT-1'", 'two taps', null],
  ['pressureOut: PT-2', 'pressureOut: §Ambient', "pressureOut is 'Ambient'", "a number of bar, or 'ambient'", "write 'ambient'"],
  ['pressureOut: PT-2', 'pressureOut: §-5', 'pressureOut is -5', 'bar gauge', null],
  ['pressureOut: PT-2', 'pressureOut: §TT-1', "pressureOut names 'TT-1', which measures temperature", 'a tag of quantity pressure', null],
  ['dpTag: PDT-3', 'dpTag: §PT-1', "dpTag names 'PT-1', which measures pressure", 'differentialPressure', null],
  ['temperatures: [TT-1]', 'temperatures: [TT-1, §FT-1]', "temperatures[1] names 'FT-1', which measures massFlow", 'a tag of quantity temperature', null],
  ['temperatures: [TT-1]', 'temperatures: [TT-1, §TT-1]', "tag 'TT-1' stands twice", 'each tag once', 'rename'],
  ['coolantTemperature: TT-9', 'coolantTemperature: §TT-90', 'names', 'a tag of quantity temperature', "did you mean 'TT-9'?"],
  ['diameterMm: 1.6', 'diameterMm: §0', 'diameterMm is 0', 'a number above 0', null],
  ['coilDiameterMm: 80', 'coilDiameterMm: §1', 'a coil of 1 mm for a bore of 1.6 mm', 'a coil wider', null],
  ['coilDiameterMm: 80', 'roughnessUm: §800', 'a roughness of 800 µm', 'less than half the bore', null],
  ['coilDiameterMm: 80', 'widthMm: §2, depthMm: 1', 'widthMm beside diameterMm', 'diameterMm, or widthMm with depthMm', 'remove one of them', 'depthMm beside diameterMm'],
  ['diameterMm: 1.6', 'widthMm: §2', 'widthMm without depthMm', 'both sides', 'add depthMm'],
  ['diameterMm: 1.6', 'coreMm: §1', 'coreMm without diameterMm', 'the bore around the core', 'add diameterMm'],
  ['coilDiameterMm: 80', 'coreMm: §1.6', 'a core of 1.6 mm in a bore of 1.6 mm', 'a core thinner', null],
  ['coilDiameterMm: 80', 'bends: §2.5', 'bends is 2.5', 'a whole number', null],
  ['warmUpKPerMin: 2', 'warmUpKPerMin: §-2', 'warmUpKPerMin is -2', 'a number above 0', null],
  ['dpHighHighBar: 8', 'dpHighHighBar: §6', 'dpHighHighBar 6 is not above dpHighBar 6', 'more than 6', null],
  ['temperatureHighHighC: 10', 'temperatureHighHighC: §-1', 'temperatureHighHighC -1 is not above temperatureHighC 0', 'more than 0', null],
  ['temperatureHighC: 0', 'temperatureHighC: §-61', 'temperatureHighC -61 is not above temperatureLowC -60', 'more than -60', null],
  ['low: 0.95, high: 1.15', 'low: 1.15, high: §0.95', 'feedRatio runs from 1.15 to 0.95', 'low below high', null],
  ['of: [B, A]', 'of: [B, §C]', "of[1] names 'C', which does not flow through R1", 'one of its streams: A, B', null],
  ['of: [B, A]', 'of: §[B, B]', "feedRatio of 'B' over itself", 'two streams', null],
  ['of: [B, A]', 'of: §[B]', 'of has 1 entries', 'a list of 2 streams', null],
  ['limitingStream: A', 'limitingStream: §C', "limitingStream names 'C', which does not flow through R1", 'one of its streams', null],
  ['enthalpyKJMol: -160', 'enthalpyKJMol: §-160000', 'enthalpyKJMol is -160000', 'kJ/mol', null],
  ['enthalpyKJMol: -160', 'enthalpyKJMol: §0', 'enthalpyKJMol is 0', 'the heat of the reaction', 'remove the reaction'],
  // alarms
  ['fouling: { action', '§foulin: { action', "unknown key 'foulin' in alarms", 'fouling, dp-limit', "did you mean 'fouling'?"],
  ['fouling: { action', '§fouling:R9: { action', "'fouling:R9' names a segment that is not there", 'alarm:SEGMENT with one of R1, F1', "did you mean 'R1'?"],
  ['action: plan a flush', 'action: §""', "action is the text ''", 'what the operator does', null],
  ['action: plan a flush', 'consequence: §null', 'consequence is null', 'what happens when nobody acts', null],
  ['action: plan a flush', 'timeToRespondSeconds: §0', 'timeToRespondSeconds is 0', 'a number above 0', null],
  ['action: plan a flush', 'priority: §urgent', "priority is the text 'urgent'", 'one of low, medium, high', null],
  ['action: plan a flush', 'latching: §yes', "latching is the text 'yes'", 'true or false', "'true'"],
  ['action: plan a flush', 'approvedOn: §31-03-2026', "approvedOn is the text '31-03-2026'", 'a date yyyy-MM-dd', 'for example'],
  ['action: plan a flush', 'approvedOn: §2026-02-30', "approvedOn is the text '2026-02-30'", 'a date yyyy-MM-dd', 'for example'],
  ['action: plan a flush', 'onDelaySeconds: §-1', 'onDelaySeconds is -1', 'seconds', null],
]

it('the base itself is good, so that each rule below breaks one thing', () => {
  expect(checkSkid(base, 'base.yaml').problems).toEqual([])
})

for (const [from, to, found, expected, hint, alsoFound] of rules) {
  it(`says "${found}" for ${JSON.stringify(to)}`, () => {
    const { text, line, column } = marked(broken(from, to))
    const { skid, problems } = checkSkid(text, 'broken.yaml')
    expect(skid).toBeNull()
    const said = problems.map((p) => `${p.line}:${p.column} ${p.message}`)
    const also = alsoFound === undefined ? [] : [expect.stringContaining(alsoFound)]
    expect(said).toEqual([expect.stringContaining(`${line}:${column} `), ...also])
    const problem = problems[0]!
    expect(problem.message).toContain(found)
    expect(problem.message).not.toContain('\n')
    expect(problem.expected).toContain(expected)
    if (hint === null) expect(problem.hint).toBeNull()
    else expect(problem.hint).toContain(hint)
  })
}
