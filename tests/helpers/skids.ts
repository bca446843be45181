import { readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import type { Skid } from '../../server/core/skid.ts'
import { loadSkid } from '../../server/skid/check.ts'

export const fixture = (name: string): string => fileURLToPath(new URL(`../../fixtures/${name}`, import.meta.url))
export const heron = (): Skid => loadSkid(readFileSync(fixture('skids/heron.yaml'), 'utf8'), 'heron.yaml')

/** Two segments on one stream between three taps: the smallest skid in which a tap has two neighbours. */
export const twoSegments = (more = ''): Skid =>
  loadSkid(
    `
skid: duo
title: Duo
timeZone: UTC
scanSeconds: 1
phaseColumn: phase
tags:
  - { tag: FT-1, quantity: massFlow, unit: kg/h, range: [0, 20] }
  - { tag: PT-1, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: PT-2, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: PT-3, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: TT-1, quantity: temperature, unit: degC, range: [-100, 200], burnout: high }
  - { tag: TT-2, quantity: temperature, unit: degC, range: [-100, 200], burnout: high }
streams:
  - { id: A, title: feed, flowTag: FT-1, fluid: { solvent: THF } }
segments:
  - { id: S1, title: first, kind: reactor, streams: [A], pressureIn: PT-1, pressureOut: PT-2, temperatures: [TT-1],
      channel: { diameterMm: 1.5, lengthM: 8 }, limits: { dpHighBar: 4, temperatureHighC: 40, flowLow: 2 } }
  - { id: S2, title: second, kind: tubing, streams: [A], pressureIn: PT-2, pressureOut: PT-3, temperatures: [TT-2],
      channel: { diameterMm: 1.5, lengthM: 8 }, limits: { dpHighBar: 4 } }
${more}`,
    'duo.yaml',
  )
