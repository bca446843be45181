import type {
  AlarmRow,
  LiveState,
  Marks,
  RunDetail,
  RunRow,
  SegmentFacts,
  SegmentState,
  Service,
  SkidFacts,
  TagState,
  Trends,
} from '../../server/wire/index.ts'

/** An invented run for page tests: everything that the server would say, as functions of a few wishes. Deterministic. */
export interface SceneOptions {
  /** Segments on the main path, 1 to 12. */
  readonly segments?: number
  readonly longNames?: boolean
  readonly hours?: number
  /** Ratio of the second segment (or the only one) at the end; it grows over the last half. */
  readonly ratio?: number | null
  readonly badSensor?: boolean
  readonly alarms?: readonly AlarmRow[]
  readonly baseline?: boolean
  readonly empty?: boolean
  readonly gap?: boolean
  readonly cutOff?: boolean
}

export const t0 = Date.UTC(2031, 0, 13, 20, 0)
const hour = 3_600_000
const noLimits = {
  dpHighBar: null,
  dpHighHighBar: null,
  pressureHighBar: null,
  temperatureHighC: null,
  temperatureHighHighC: null,
  temperatureLowC: null,
  flowLow: null,
}
const pad = (n: number) => String(n).padStart(2, '0')

export function factsOf(o: SceneOptions): SkidFacts {
  const n = o.segments ?? 3
  const name = (i: number) => (o.longNames === true ? `REACTOR-LOOP-NORTH-${pad(i + 1)}` : `S${i + 1}`)
  const segments: SegmentFacts[] = Array.from({ length: n }, (_, i) => ({
    id: name(i),
    title: o.longNames === true ? `reactor loop ${i + 1} behind the second heat exchanger of the north wing` : `segment ${i + 1}`,
    kind: i === 0 ? 'precooler' : 'reactor',
    streams: i < 2 ? ['A'] : ['A', 'C'],
    leadsTo: i + 1 < n ? name(i + 1) : null,
    main: true,
    share: 1 / n,
    volumeMl: 40,
    channel: { boreMm: 1.5, lengthM: 12, parallel: 1 },
    pressureIn: `PT-${pad(i)}`,
    pressureOut: `PT-${pad(i + 1)}`,
    dpTag: null,
    heldOutBar: null,
    temperatures: [`TT-${pad(i)}1`, `TT-${pad(i)}2`, `TT-${pad(i)}3`],
    coolantTemperature: 'TT-190',
    limits: { ...noLimits, dpHighBar: 4, temperatureHighC: -5 },
    feedRatio: null,
  }))
  if (n > 1)
    segments.push({
      ...segments[0]!,
      id: 'PB',
      title: 'precooler B',
      main: false,
      share: null,
      streams: ['B'],
      leadsTo: name(1),
      temperatures: ['TT-PB'],
    })
  const tag = (t: string, quantity: string, unit: string, range: [number, number]) => ({ tag: t, quantity, unit, range })
  return {
    skid: o.longNames === true ? 'pilot-skid-with-a-name-that-does-not-end' : 'plover',
    title: 'Plover, invented',
    timeZone: 'Europe/Amsterdam',
    scanSeconds: 1,
    lateSeconds: 2,
    stepSeconds: 30,
    detection: { falseAlarmDays: 30, riseToFindPct: 5 },
    tags: [
      ...Array.from({ length: n + 1 }, (_, i) => tag(`PT-${pad(i)}`, 'pressure', 'bar', [0, 25])),
      ...segments.flatMap((s) => s.temperatures.map((t) => tag(t, 'temperature', 'degC', [-100, 200]))),
      tag('TT-190', 'temperature', 'degC', [-100, 200]),
      tag('FT-1', 'massFlow', 'kg/h', [0, 20]),
      tag('FT-2', 'massFlow', 'kg/h', [0, 10]),
      tag('FT-3', 'massFlow', 'kg/h', [0, 10]),
    ],
    streams: [
      { id: 'A', title: 'substrate', flowTag: 'FT-1', reagent: 'thiophene', waterPpm: 85, molHPerFlowUnit: 1.1 },
      { id: 'B', title: 'organolithium', flowTag: 'FT-2', reagent: 'n-hexyllithium', waterPpm: 5, molHPerFlowUnit: 3.3 },
      { id: 'C', title: 'electrophile', flowTag: 'FT-3', reagent: null, waterPpm: null, molHPerFlowUnit: null },
    ],
    segments,
  }
}

/** The segment of the scene that closes. */
export const closing = (facts: SkidFacts): string => (facts.segments.filter((s) => s.main)[1] ?? facts.segments[0]!).id

export function sceneOf(o: SceneOptions = {}) {
  const facts = factsOf(o)
  const hours = o.hours ?? 6
  const endMs = o.empty === true ? t0 : t0 + hours * hour
  const top = o.ratio === undefined ? 1.34 : o.ratio
  const hot = closing(facts)
  const onsetMs = t0 + 0.5 * hours * hour
  const noise = (i: number, t: number) => 0.004 * Math.sin(i * 12.9 + t / 47_000) + 0.003 * Math.sin(i * 3.1 + t / 131_000)
  const ratioAt = (id: string, i: number, t: number): number | null => {
    if (o.baseline === false || o.empty === true) return null
    if (id !== hot) return 1.01 + noise(i, t)
    if (top === null) return t > t0 + 0.9 * hours * hour ? null : 1
    const share = Math.max(0, (t - onsetMs) / (t0 + hours * hour - onsetMs))
    return (1 - share * (1 - top ** -0.25)) ** -4 + noise(i, t)
  }
  const standing = (id: string) => {
    const a = (o.alarms ?? []).filter((x) => x.segment === id && x.active).at(-1)
    return a === undefined ? null : { alarm: a.id, priority: a.priority, needsAck: a.needsAck }
  }
  const segmentAt = (s: SegmentFacts, i: number, t: number): SegmentState => {
    const ratio = ratioAt(s.id, i, t)
    const growing = s.id === hot && top !== null && top > 1.05 && o.baseline !== false && o.empty !== true
    return {
      segment: s.id,
      atMs: o.empty === true ? null : t,
      ratio,
      dpBar: ratio === null ? null : 2.1 * ratio,
      cleanDpBar: ratio === null ? null : 2.1,
      flowMlMin: 150,
      tempC: -18,
      ratioMax: ratio,
      dpNowBar: ratio === null ? null : 2.1 * ratio,
      temperatures: s.temperatures.map((tag, k) => ({ tag, tempC: -19 + k * 1.4 })),
      growthPerHour: growing ? 0.12 : null,
      onset: growing ? { atMs: onsetMs, lowMs: onsetMs - 1_100_000, highMs: onsetMs + 900_000, level: 0.9 } : null,
      forecast: growing
        ? { atMs: t + 2.3 * hour, lowMs: t + 1.9 * hour, highMs: t + 2.8 * hour, level: 0.8, limit: 'dpHighBar', limitBar: 4 }
        : null,
      baseline:
        o.baseline === false || o.empty === true
          ? null
          : { fromMs: t0 + 600_000, toMs: t0 + 2_400_000, dpBar: 2.1, sigma: 0.006, provisional: false },
      limits: s.limits,
      standing: standing(s.id),
    }
  }
  const tagAt = (tag: string, unit: string | null, t: number): number =>
    unit === 'degC'
      ? -20 + (tag.endsWith('2') ? 5 : tag.endsWith('3') ? 2 : 0) + Math.sin(t / 600_000 + tag.charCodeAt(4))
      : unit === 'bar'
        ? 9 - Number(tag.slice(3)) * 0.6
        : 6 + 0.05 * Math.sin(t / 90_000)
  const stateAt = (t: number): LiveState => {
    const tags: TagState[] = facts.tags.map((x) => {
      const bad = o.badSensor === true && x.tag === facts.segments.filter((s) => s.main).at(-1)!.temperatures[1]
      return {
        tag: x.tag,
        value: o.empty === true ? null : tagAt(x.tag, x.unit, t),
        unit: x.unit,
        atMs: o.empty === true ? null : t,
        quality: o.empty === true ? 'none' : bad ? 'bad' : 'good',
        reason: bad ? 'frozen' : null,
        held: false,
      }
    })
    return {
      run: 1,
      clock: { kind: 'simulated', nowMs: t, speed: 60 },
      mode: { phase: o.empty === true ? null : 'production', production: o.empty !== true, inferred: false },
      data: {
        lastRowMs: o.empty === true ? null : t,
        ageS: o.empty === true ? null : o.cutOff === true ? 14 : 0.4,
        cutOff: o.cutOff === true,
        lagS: 0.1,
        source: { state: 'running', message: null },
      },
      comb: { scanMs: 1000, endMs: t, received: Array.from({ length: 30 }, (_, i) => o.empty !== true && i % 11 !== 4) },
      segments: facts.segments.map((s, i) => segmentAt(s, i, t)),
      tags,
      alarms: o.alarms ?? [],
      flood: floodOf(o.alarms ?? [], t),
      flush: null,
      advice: (o.alarms ?? []).some((a) => a.kind === 'fouling' && a.active)
        ? [
            {
              at: new Date(t - hour).toISOString(),
              atMs: t - hour,
              action: 'flush',
              segments: [hot],
              reason: `${hot}: deposit is growing, began about ${new Date(onsetMs).toISOString()}; the limit is met between ${new Date(t + 1.9 * hour).toISOString()} and ${new Date(t + 2.8 * hour).toISOString()} (80 %)`,
              plan: planOf(hot),
            },
          ]
        : [],
    }
  }
  const alarmCounts = { high: 0, medium: 0, low: 0, unacknowledged: 0 }
  for (const a of o.alarms ?? []) {
    alarmCounts[a.priority]++
    if (a.needsAck) alarmCounts.unacknowledged++
  }
  const row: RunRow = {
    run: 1,
    skid: facts.skid,
    title: facts.title,
    state: 'live',
    kind: 'simulated',
    source: 'scripted for tests',
    fault: null,
    fromMs: o.empty === true ? null : t0,
    toMs: o.empty === true ? null : endMs,
    rows: 21_600,
    clock: { kind: 'simulated', nowMs: endMs, speed: 60 },
    alarms: alarmCounts,
    fouling: top === null ? null : { segment: hot, ratio: top },
    progress: null,
  }
  const detail: RunDetail = { ...row, skidFacts: facts, toolVersion: '0.0.0', cautions: ['Advisory only.'] }
  const inGap = (t: number) => o.gap === true && t > t0 + 0.6 * hours * hour && t < t0 + 0.63 * hours * hour
  const trends = (fromMs: number, toMs: number, buckets: number): Trends => {
    const bucketMs = Math.max(1, (toMs - fromMs) / buckets)
    const times = Array.from({ length: buckets }, (_, i) => fromMs + (i + 0.5) * bucketMs)
    const known = (t: number) => o.empty !== true && t >= t0 && t <= endMs && !inGap(t)
    const band = (f: (t: number) => number | null) => {
      const mean = times.map((t) => (known(t) ? f(t) : null))
      return {
        mean,
        min: mean.map((v) => (v === null ? null : v - 0.002 * Math.abs(v))),
        max: mean.map((v) => (v === null ? null : v + 0.002 * Math.abs(v))),
      }
    }
    return {
      run: 1,
      fromMs,
      bucketMs,
      buckets,
      segments: facts.segments.map((s, i) => ({
        segment: s.id,
        ratio: band((t) => ratioAt(s.id, i, t)),
        dpBar: band((t) => {
          const r = ratioAt(s.id, i, t)
          return r === null ? null : 2.1 * r
        }),
        flowMlMin: band(() => 150),
        tempC: band(() => -18),
        cusum: band((t) => (ratioAt(s.id, i, t) === null ? null : 0.2)),
        cusumLow: band((t) => (ratioAt(s.id, i, t) === null ? null : 0.1)),
      })),
      tags: facts.tags.map((x) => ({ tag: x.tag, unit: x.unit, ...band((t) => tagAt(x.tag, x.unit, t)) })),
      production: times.map((t) => (t >= t0 && t <= endMs ? t > t0 + 300_000 : null)),
    }
  }
  const marks: Marks = {
    run: 1,
    baselines: [],
    onsets: [],
    limits: facts.segments.flatMap((s) => [
      { segment: s.id, limit: 'dpHighBar' as const, fromMs: t0, value: s.id === hot ? 4.4 : 4, person: null, reason: null },
      ...(s.id === hot && o.empty !== true
        ? [
            {
              segment: s.id,
              limit: 'dpHighBar' as const,
              fromMs: t0 + 0.3 * hours * hour,
              value: 4,
              person: 'demo operator',
              reason: 'agreed at hand-over',
            },
          ]
        : []),
      { segment: s.id, limit: 'temperatureHighC' as const, fromMs: t0, value: -5, person: null, reason: null },
    ]),
    forecasts: [],
    notes: [],
  }
  const service: Service = {
    api: 1,
    tool: { name: 'clearbore', version: '0.0.0' },
    cautions: ['Advisory only.'],
    demo: true,
    uploadMaxBytes: 50_000_000,
    wallMs: endMs,
  }
  return { facts, detail, row, state: stateAt(endMs), stateAt, trends, marks, service, endMs, hot }
}

/** The flood that a server would tell of: more than ten of the ten minutes before, with the oldest of them. */
function floodOf(alarms: readonly AlarmRow[], t: number): LiveState['flood'] {
  const recent = alarms
    .filter((a) => a.raisedMs <= t && t - a.raisedMs < 600_000)
    .sort((a, b) => a.raisedMs - b.raisedMs || a.id - b.id)
  return recent.length > 10 ? { sinceMs: recent[10]!.raisedMs, count: recent.length, first: recent[0]! } : null
}
export type Scene = ReturnType<typeof sceneOf>

export function alarmOf(id: number, more: Partial<AlarmRow> = {}): AlarmRow {
  const raisedMs = more.raisedMs ?? t0 + 4 * hour
  return {
    id,
    key: `fouling:S${id}`,
    kind: 'fouling',
    priority: 'medium',
    segment: 'S2',
    tag: null,
    state: 'UNACK',
    active: true,
    needsAck: true,
    badInput: false,
    raisedMs,
    clearedMs: null,
    acknowledgedMs: null,
    acknowledgedBy: null,
    shelvedUntilMs: null,
    aside: null,
    shelveMaxMin: more.priority === 'high' ? 0 : 30,
    value: 1.08,
    limit: 1,
    unit: 'ratio',
    message: `segment 2: deposit is growing, resistance 1.080 times clean, began about ${new Date(t0 + 3 * hour).toISOString()}`,
    cause: 'fouling',
    onset: {
      at: new Date(t0 + 3 * hour).toISOString(),
      low: new Date(t0 + 2.7 * hour).toISOString(),
      high: new Date(t0 + 3.25 * hour).toISOString(),
      level: 0.9,
    },
    detector: 'growth likelihood',
    evidence: {
      for: ['only this segment rises, its neighbours are flat', 'flow steady within 0.4 %'],
      against: [],
      notExcluded: ['salt at the mixing point'],
    },
    help: {
      title: 'Flow resistance rising',
      causes: 'wall deposit, bridging at a mixer',
      consequence: 'Unplanned stop once the differential pressure limit is reached.',
      check: 'Compare the neighbouring segments; look at the forecast.',
      action: 'Plan a flush at the next hold, before the forecast less its margin.',
      timeToRespondS: 1800,
      review: 'default text, to be reviewed by the site',
    },
    ...more,
  }
}

function planOf(segment: string) {
  const ids = ['F0', 'F1', 'F2', 'F3', 'F4', 'F5', 'F6']
  const titles = ['Prepare', 'Displace with dry solvent', 'Warm up', 'Water', 'Dry solvent', 'Cool down', 'Restart, diverted']
  return {
    steps: ids.map((id, i) => ({
      id,
      title: titles[i]!,
      liquid: i === 3 ? 'water' : i === 0 ? null : 'tetrahydrofuran',
      flowMlMin: i === 0 ? null : 96.4,
      volumeMl: i === 0 ? null : 410,
      minutes: i === 0 ? 10 : 4 + i,
      holdPoints: [`hold point of ${id}: dry solvent 9 L at hand`],
      endsWhen: ['the course is followed to its end'],
      hazards:
        i === 3
          ? ['Do not admit water before displacement and warm-up are both confirmed.']
          : ['Assume the line holds active organolithium until the effluent test says otherwise.'],
      basis: [],
      criteria: [],
    })),
    segments: [segment],
    path: [segment],
    totalMinutes: 49,
    inventory: [
      {
        segment,
        volumeMl: 40,
        reagents: [{ stream: 'B', name: 'n-hexyllithium', mol: 0.031 }],
        hydrolysisKJ: 7.1,
        hydrolysisRiseK: 96,
        reactionKJ: 5,
      },
    ],
    waterReference: [],
    refused: [],
    cautions: [
      'Advisory only: follow approved site procedures, local codes and licensed, competent persons; a recommendation may be wrong.',
    ],
    assumptions: ['plug flow with the stated washout'],
    missing: [],
  }
}
