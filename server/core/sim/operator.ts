import { fluidOf } from '../fluids/fluid.ts'
import { type PropertyTable, propertyTable } from '../fluids/property-table.ts'
import type { Course } from '../flush/course-state.ts'
import type { Phase } from '../reading.ts'
import { m3sFromMlMin } from '../units.ts'
import { FEED_K, type Plant } from './plant-model.ts'

/** A step that the simulated operator has been told is confirmed; plain JSON, kept with the source's state. */
export interface Order extends Asked {
  /** From when on it is done; not before the rows that are out already. */
  readonly atMs: number
}
export interface Asked {
  /** Which flush, and when a person confirmed the step. */
  readonly flush: number
  readonly askedMs: number
  /** F0 to F6; `quench-off` within F1; `production` when F6 is accepted. */
  readonly does: string
  /** Segments of the flush path. */
  readonly path: readonly string[]
  readonly solvent: string
  readonly flowMlMin: number | null
  readonly volumeMl: number | null
}

/** What a course has confirmed so far, in order: each step that began, the quench shut once the effluent is inactive, production once all is done. */
export function askedBy(c: Course): Asked[] {
  const solvent = (c.steps.find((x) => x.step === 'F1')?.liquid ?? '').replace(/^dry /, '')
  const of = (does: string, askedMs: number, flowMlMin: number | null, volumeMl: number | null): Asked => ({
    flush: c.flush,
    askedMs,
    does,
    path: c.path,
    solvent,
    flowMlMin,
    volumeMl,
  })
  const out = c.steps.flatMap((x) => {
    if (x.startedMs === null) return []
    const inactive = x.points.find((p) => p.criterion === 'effluent-inactive' && p.state === 'met')?.tMs ?? null
    return [
      of(x.step, x.startedMs, x.flowMlMin, x.plannedMl),
      ...(inactive === null ? [] : [of('quench-off', inactive, null, null)]),
    ]
  })
  return c.state === 'complete' && c.endedMs !== null ? [...out, of('production', c.endedMs, null, null)] : out
}

/** The demo's own choices: warm-up and cooling rate, where a warm bath stands, share of the flow that water begins with, share of the deposit that dissolves. */
const ways = { ratePerS: 2 / 60, warmK: 287.15, waterStart: 0.15, dissolved: 0.97, dissolvedAt: 0.6, rampS: 300 } as const
/** The deposit begins to grow again so long after production does, ms: feed A is as wet as before. */
const growsAgainMs = 25 * 60_000

/** Volume shares of what fills a segment. */
export interface Filling {
  feeds: number
  solvent: number
  water: number
}

/**
 * The simulated operator of a flush: does what the confirmed steps say, on the true plant, and nothing before. Moves by the plant's steps only, so the
 * same orders at the same times give the same rows.
 */
export function createOperator(plant: Plant, orders: readonly Order[]) {
  const tables = new Map<string, PropertyTable>()
  const table = (name: string): PropertyTable => {
    const found = tables.get(name) ?? propertyTable(fluidOf({ kind: 'solvent', solvent: name }))
    tables.set(name, found)
    return found
  }
  const water = table('water')
  const filling = plant.segments.map((): Filling => ({ feeds: 1, solvent: 0, water: 0 }))
  const shiftK = plant.coolants.map(() => 0)
  let now: Order | null = null
  let quenchOff = false
  /** Feeds stopped at, and production since; the deposit stands still between. */
  let stoppedMs: number | null = null
  let producingMs: number | null = null
  /** Share of the deposit left, of that which stood when the feeds stopped. */
  let left = 1
  let passedM3 = 0
  let next = 0

  const onPath = (i: number): boolean =>
    now !== null && plant.segments.some((s) => now!.path.includes(s.spec.id) && s.streams.includes(i))
  const volumeOf = (i: number): number => plant.streams[i]!.nominalKgS / plant.streams[i]!.fluid.rhoKgM3(FEED_K)
  const feeding = (): boolean => now === null || now.does === 'F6'
  const liquid = (): PropertyTable | null => (now === null || feeding() ? null : now.does === 'F3' ? water : table(now.solvent))

  function hear(tMs: number): void {
    for (; next < orders.length && orders[next]!.atMs <= tMs; next++) {
      const o = orders[next]!
      if (o.does === 'quench-off') quenchOff = true
      else if (o.does === 'production') {
        if (now !== null) producingMs = o.atMs
        now = null
        quenchOff = false
      } else {
        if (o.does === 'F0' && now === null) {
          stoppedMs = o.atMs
          left = 1
        }
        if (o.does === 'F6') quenchOff = false
        passedM3 = 0
        now = o
      }
    }
  }

  return {
    /** Once a step, before the plant moves; dtS after the last. */
    step(tMs: number, dtS: number): void {
      hear(tMs)
      plant.coolants.forEach((c, k) => {
        const served = now !== null && plant.segments.some((s) => s.coolant === k && now!.path.includes(s.spec.id))
        const warm = served && (now!.does === 'F2' || now!.does === 'F3' || now!.does === 'F4')
        const target = warm ? Math.max(0, ways.warmK - c.nominalK) : 0
        const most = ways.ratePerS * dtS
        shiftK[k] = shiftK[k]! + Math.max(-most, Math.min(most, target - shiftK[k]!))
      })
    },

    /** Mass flow asked of a stream in a flush, kg/s; null where the plant runs as ever. */
    wantKgS(i: number, tMs: number): number | null {
      if (now === null) return null
      const { nominalKgS } = plant.streams[i]!
      if (now.does === 'F6') return nominalKgS * Math.min(1, 0.3 + (0.7 * (tMs - now.atMs)) / 1000 / ways.rampS)
      if (!onPath(i)) return quenchOff ? 0 : nominalKgS
      const through = liquid()
      if (now.does === 'F0' || now.does === 'F2' || through === null) return 0
      const all = plant.streams.reduce((a, _, k) => a + (onPath(k) ? volumeOf(k) : 0), 0)
      const first = plant.segments.reduce((a, s) => a + (now!.path.includes(s.spec.id) ? s.volumeM3 : 0), 0)
      const share = now.does === 'F3' && passedM3 < first ? ways.waterStart : 1
      const flow = now.flowMlMin === null ? 0.5 * all : m3sFromMlMin(now.flowMlMin)
      return share * flow * (volumeOf(i) / all) * through.rhoKgM3(FEED_K)
    },

    /** What passed in this step: fills the segments one after the other, each well mixed, and dissolves. */
    pass(massKgS: ArrayLike<number>, dtS: number): void {
      if (now === null && filling.every((f) => f.feeds > 0.99999)) return
      const through = liquid()
      const into: Filling =
        through === null
          ? { feeds: 1, solvent: 0, water: 0 }
          : through === water
            ? { feeds: 0, solvent: 0, water: 1 }
            : { feeds: 0, solvent: 1, water: 0 }
      const flowOf = (i: number): number => massKgS[i]! / (through?.rhoKgM3(FEED_K) ?? plant.streams[i]!.fluid.rhoKgM3(FEED_K))
      let all = 0
      plant.streams.forEach((_, i) => {
        if (onPath(i)) all += flowOf(i)
      })
      passedM3 += all * dtS
      const before = filling.map((f) => ({ ...f }))
      plant.segments.forEach((s, n) => {
        if (now !== null && !now.path.includes(s.spec.id)) return
        let flow = 0
        const inlet = { feeds: 0, solvent: 0, water: 0 }
        s.streams.forEach((i, k) => {
          const q = flowOf(i)
          const from = s.upstream[k]! < 0 ? into : before[s.upstream[k]!]!
          flow += q
          for (const key of ['feeds', 'solvent', 'water'] as const) inlet[key] += q * from[key]
        })
        if (flow <= 0) return
        const a = 1 - Math.exp((-flow * dtS) / s.volumeM3)
        const f = filling[n]!
        for (const key of ['feeds', 'solvent', 'water'] as const) f[key] += a * (inlet[key] / flow - f[key])
      })
      if (now?.does === 'F3' && now.volumeMl !== null) {
        const gone = (all * dtS * 1e6) / (ways.dissolvedAt * now.volumeMl)
        left = Math.max(1 - ways.dissolved, left - ways.dissolved * gone)
      }
    },

    /** The ratio of a segment: its deposit's own course while feeds run, held and dissolved in a flush, growing anew in what follows. */
    ratio(tMs: number, course: (tMs: number) => number, onsetMs: number): number {
      if (stoppedMs === null || tMs < stoppedMs) return course(tMs)
      const held = 1 + (course(stoppedMs) - 1) * left
      if (producingMs === null || producingMs < stoppedMs) return held
      const again = tMs - producingMs - growsAgainMs
      return again <= 0 ? held : held + course(onsetMs + again) - 1
    },

    shiftK: (coolant: number): number => shiftK[coolant]!,
    filling: (segment: number): Filling => filling[segment]!,
    /** Anything but feeds somewhere in the plant. */
    filled: (): boolean => filling.some((f) => f.feeds <= 0.99999),
    feeding,
    solvent: (): PropertyTable => table(now?.solvent ?? orders.at(-1)?.solvent ?? 'tetrahydrofuran'),
    water,
    /** The phase that the log names; null where the plan of the scenario stands. */
    phase: (): Phase | null =>
      now !== null ? (now.does === 'F6' ? 'startup' : 'flush') : producingMs !== null ? 'production' : null,
  }
}
export type Operator = ReturnType<typeof createOperator>
