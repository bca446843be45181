/** A small good skid file that the tests break in one place at a time. Invented. */
export const base = `skid: plover
title: Plover bench skid
timeZone: Europe/Amsterdam
scanSeconds: 1
lateSeconds: 2
phaseColumn: phase
log:
  time: [Date, Time]
  timeFormat: dd/MM/yyyy HH.mm.ss
  missing: [-200]
detection: { falseAlarmDays: 30, riseToFindPct: 5 }
tags:
  - { tag: PT-1, column: inlet, quantity: pressure, unit: bar, range: [0, 25], accuracyPct: 0.1 }
  - { tag: PT-2, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: PDT-3, quantity: differentialPressure, unit: mbar, range: [0, 2500] }
  - { tag: FT-1, quantity: massFlow, unit: kg/h, range: [0, 20] }
  - { tag: FT-2, quantity: volumeFlow, unit: mL/min, range: [0, 200] }
  - { tag: TT-1, quantity: temperature, unit: degC, range: [-100, 200], sensor: K, burnout: high }
  - { tag: TT-9, quantity: temperature, unit: degC, range: [-100, 200] }
  - { tag: SP-9, quantity: setpoint, setpointFor: TT-9 }
streams:
  - id: A
    flowTag: FT-1
    fluid: { solvent: THF }
    waterPpm: 60
    reagent: { name: thiophene, concentrationMolL: 1.0 }
  - id: B
    flowTag: FT-2
    fluid: { mixture: [{ solvent: hexane, massFraction: 0.7 }, { solvent: toluene, massFraction: 0.3 }] }
    reagent: { name: n-hexyllithium, concentrationMolL: 2.3 }
  - id: C
    flowTag: FT-2
    fluid: { densityKgM3: 940, viscosityMPaS: [[-20, 1.6], [20, 0.85]] }
segments:
  - id: R1
    kind: reactor
    streams: [A, B]
    pressureIn: PT-1
    pressureOut: PT-2
    temperatures: [TT-1]
    coolantTemperature: TT-9
    channel: { diameterMm: 1.6, lengthM: 15, parallel: 2, coilDiameterMm: 80 }
    volumeMl: 60
    warmUpKPerMin: 2
    limits:
      dpHighBar: 6
      dpHighHighBar: 8
      temperatureLowC: -60
      temperatureHighC: 0
      temperatureHighHighC: 10
      feedRatio: { of: [B, A], low: 0.95, high: 1.15 }
    reaction: { limitingStream: A, concentrationMolL: 1.0, enthalpyKJMol: -160 }
  - id: F1
    kind: filter
    streams: [A, B]
    dpTag: PDT-3
alarms:
  fouling: { action: plan a flush }
`

/** The base with its first \`from\` replaced; it must be there. */
export function broken(from: string, to: string): string {
  if (!base.includes(from)) throw new Error(`the base holds no '${from}'`)
  return base.replace(from, () => to)
}

/** A text with § where a problem is expected: the text without it, and the place. */
export function marked(text: string): { text: string; line: number; column: number } {
  const at = text.indexOf('§')
  if (at < 0 || text.indexOf('§', at + 1) >= 0) throw new Error('one § wanted')
  const before = text.slice(0, at).split('\n')
  return { text: text.replace('§', ''), line: before.length, column: (before.at(-1)?.length ?? 0) + 1 }
}
