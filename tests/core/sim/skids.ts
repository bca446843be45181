import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import type { SegmentSpec, Skid, TagSpec } from '../../../server/core/skid.ts'
import { loadSkid } from '../../../server/skid/check.ts'

const file = join(import.meta.dirname, '../../../fixtures/skids/heron.yaml')
export const heron: Skid = loadSkid(readFileSync(file, 'utf8'), file)

const tag = (id: string, quantity: TagSpec['quantity'], unit: TagSpec['unit'], range: TagSpec['range']): TagSpec => ({
  tag: id,
  column: id,
  quantity,
  unit,
  range,
  accuracyPct: 0.25,
  accuracyAssumed: true,
  signal: null,
  sensor: null,
  burnout: null,
  setpointFor: null,
})

const none = {
  dpHighBar: null,
  dpHighHighBar: null,
  pressureHighBar: null,
  temperatureHighC: null,
  temperatureHighHighC: null,
  temperatureLowC: null,
  flowLow: null,
  feedRatio: null,
}
const segment = (over: Partial<SegmentSpec> & Pick<SegmentSpec, 'id' | 'dp'>): SegmentSpec => ({
  title: over.id,
  kind: 'tubing',
  streams: ['W'],
  temperatures: [],
  coolantTemperature: null,
  channel: null,
  volumeMl: null,
  warmUpKPerMin: null,
  limits: none,
  reaction: null,
  ...over,
})

/** A rig with everything optional left out: a volume flow in L/h, a dP cell in psi, a held outlet, no geometry, no phases. */
export const bare: Skid = {
  ...heron,
  skid: 'bare',
  phaseColumn: null,
  log: [],
  tags: [
    tag('FT-1', 'volumeFlow', 'L/h', null),
    tag('PDT-1', 'differentialPressure', 'psi', [0, 10]),
    tag('PT-1', 'pressure', 'mbar', [0, 4000]),
    tag('LT-1', 'level', '%', [0, 100]),
    tag('PT-2', 'pressure', 'mA', [0, 10]),
  ],
  streams: [
    { id: 'W', title: 'water', flowTag: 'FT-1', fluid: { kind: 'solvent', solvent: 'water' }, waterPpm: null, reagent: null },
  ],
  segments: [
    segment({ id: 'T1', dp: { kind: 'held', pressureIn: 'PT-1', outBar: 0.5, ambient: false } }),
    segment({ id: 'F1', kind: 'filter', dp: { kind: 'dp', dpTag: 'PDT-1' }, limits: { ...none, dpHighBar: 0.4 } }),
  ],
  alarms: {},
}
