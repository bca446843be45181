import type { AlarmReport, ForecastReport, OnsetReport, Report, TimelinePoint } from '../../server/core/report.ts'
import type { TrueFouling, Truth } from '../../server/core/sim/truth.ts'
import type { SegmentSpec, Skid } from '../../server/core/skid.ts'

/** Times of the hand-made case: minutes after 2031-05-05T00:00Z. */
export const at = (minutes: number): string => new Date(Date.UTC(2031, 4, 5) + minutes * 60_000).toISOString()

const segment = (id: string, taps: readonly [string, string], temperatures: readonly string[]): SegmentSpec => ({
  id,
  title: id,
  kind: id === 'F1' ? 'filter' : 'reactor',
  streams: ['A', 'B'],
  dp: { kind: 'taps', pressureIn: taps[0], pressureOut: taps[1] },
  temperatures,
  coolantTemperature: 'TT-190',
  channel: null,
  volumeMl: null,
  warmUpKPerMin: null,
  limits: {
    dpHighBar: 6,
    dpHighHighBar: null,
    pressureHighBar: null,
    temperatureHighC: null,
    temperatureHighHighC: null,
    temperatureLowC: null,
    flowLow: null,
    feedRatio: null,
  },
  reaction: null,
})

export const skid: Skid = {
  skid: 'wren',
  title: 'Wren',
  timeZone: 'UTC',
  scanSeconds: 1,
  lateSeconds: 2,
  phaseColumn: 'phase',
  log: [],
  detection: { falseAlarmDays: 30, riseToFindPct: 5 },
  tags: [],
  streams: [
    { id: 'A', title: 'A', flowTag: 'FT-101', fluid: null, waterPpm: null, reagent: null },
    { id: 'B', title: 'B', flowTag: 'FT-102', fluid: null, waterPpm: null, reagent: null },
  ],
  segments: [
    segment('R1', ['PT-110', 'PT-112'], ['TT-111', 'TT-112']),
    segment('R2', ['PT-112', 'PT-113'], ['TT-121']),
    segment('F1', ['PT-113', 'PT-115'], []),
  ],
  alarms: {},
}

/** A growth of R1 from minute 100, ratio rising by 0.01 a minute, limit at minute 200 (ratio 2), log end at 220. */
export const growth: TrueFouling = {
  segment: 'R1',
  cause: 'fouling',
  model: 'linear',
  localFraction: null,
  onset: at(100),
  end: at(220),
  endedBy: 'log end',
  limitAt: at(200),
  limitReached: true,
  limitRatioNominal: 2,
  dpHighBar: 6,
  ratioAtOnset: 1,
  ratioMax: 2.2,
  ratioAfterFlush: null,
  sloughs: [],
  trajectory: [
    [0, 1],
    [3600, 1.6],
    [7200, 2.2],
  ],
  checkpoints: [25, 50, 75].map((p) => ({
    fraction: p / 100,
    at: at(100 + p),
    ratio: 1 + p / 100,
    limitAtHeld: at(200),
    sloughAhead: false,
  })),
}

export function truthWith(over: Partial<Truth> = {}): Truth {
  return {
    case: 'w-1',
    category: 'fouling',
    skid: 'wren',
    logSeconds: '1s',
    from: at(0),
    to: at(220),
    phases: [{ phase: 'production', from: at(0), to: at(220) }],
    productionHours: 220 / 60,
    inControlHours: 100 / 60,
    inControl: [{ from: at(0), to: at(100) }],
    fouling: [growth],
    exotherms: [],
    feedErrors: [],
    sensorFaults: [],
    confounders: [],
    dirty: { nanCells: {}, missingRows: 0, duplicateRows: 0, outOfOrderRows: 0, brokenRows: 0, notes: [], kinds: [], rows: 13200 },
    ratio: {
      everySeconds: 600,
      start: at(0),
      segments: {
        R1: Array.from({ length: 23 }, (_, i) => 1 + Math.max(0, i * 10 - 100) / 100),
        R2: Array(23).fill(1),
        F1: Array(23).fill(1),
      },
    },
    ...over,
  }
}

let ids = 0
export const alarm = (kind: AlarmReport['kind'], minutes: number, over: Partial<AlarmReport> = {}): AlarmReport => ({
  id: ++ids,
  kind,
  priority: 'high',
  segment: 'R1',
  tag: null,
  raised: at(minutes),
  cleared: null,
  value: null,
  limit: null,
  unit: null,
  message: '',
  cause: kind === 'fouling' ? 'fouling' : null,
  onset: null,
  detector: 'test',
  evidence: { for: [], against: [], notExcluded: [] },
  configuration: 0,
  ...over,
})

export const onset = (mid: number, low: number, high: number): OnsetReport => ({
  at: at(mid),
  low: at(low),
  high: at(high),
  level: 0.9,
})
export const forecast = (mid: number, low: number, high: number): ForecastReport => ({
  limit: 'dpHighBar',
  at: at(mid),
  low: at(low),
  high: at(high),
  level: 0.8,
})
export const point = (
  minutes: number,
  segmentId: string,
  ratio: number | null,
  f: ForecastReport | null = null,
): TimelinePoint => ({
  at: at(minutes),
  segment: segmentId,
  ratio,
  forecast: f,
})

export function reportWith(
  alarms: readonly AlarmReport[],
  timeline: readonly TimelinePoint[] = [],
  hindsight: OnsetReport | null = null,
): Report {
  return {
    report: 1,
    run: {
      skid: 'wren',
      from: at(0),
      to: at(220),
      scans: 0,
      tags: [],
      rows: { total: 0, late: 0, repeated: 0, outOfOrder: 0, badTime: 0 },
      phaseInferred: false,
      configuration: [],
    },
    segments: [
      {
        segment: 'R1',
        baseline: null,
        baselines: [],
        ratio: { last: null, max: null },
        onset: hindsight,
        growthPerHour: null,
        forecast: null,
        chart: null,
        deposit: null,
        heat: null,
        learned: null,
      },
    ],
    alarms,
    advice: [],
    timeline,
    notes: [],
    streams: [],
    outlet: [],
    alarmMetrics: null,
    flushes: [],
  }
}
