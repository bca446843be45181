import type { Overlay } from './overlay.ts'
import type { RunData } from './run-data.ts'
import { gapsOf } from './series.ts'
import type { TrendView } from './trend-spec.ts'

/** Hatched stretches: no row of the log, or rows but no ratio while in production. */
export function gaps(data: RunData, view: TrendView, rhythm: number, segment: string | null): Overlay['gaps'] {
  const { hm } = data.clock
  const near = (g: { fromMs: number; toMs: number }) => g.toMs > view.fromMs && g.fromMs < view.atMs
  const heard = data.heard.points()
  const silent = gapsOf(heard).filter(near)
  const last = heard.at(-1)
  if (last !== undefined && view.atMs - last.x > Math.max(120_000, rhythm)) silent.push({ fromMs: last.x, toMs: view.atMs })
  const named = silent.map((g) => ({ ...g, label: `no data ${hm(g.fromMs)} to ${g.toMs === view.atMs ? 'now' : hm(g.toMs)}` }))
  if (segment === null) return named
  const produced = data.production.points()
  const between = (g: { fromMs: number; toMs: number }) => produced.some((p) => p.y === 0 && p.x >= g.fromMs && p.x <= g.toMs)
  const inside = (g: { fromMs: number; toMs: number }) => silent.some((s) => s.fromMs < g.toMs && s.toMs > g.fromMs)
  const blind = gapsOf(data.segments.get(segment)?.ratio.points() ?? []).filter((g) => near(g) && !between(g) && !inside(g))
  // Rows still come, but no ratio since some time.
  const own = data.segments.get(segment)?.ratio.points().at(-1)
  const end = produced.at(-1)
  const quietMs = Math.max(4000 * data.detail.skidFacts.stepSeconds, rhythm)
  if (
    own !== undefined &&
    end?.y === 1 &&
    end.x - own.x > quietMs &&
    end.x <= view.atMs + quietMs &&
    !inside({ fromMs: own.x, toMs: view.atMs })
  )
    blind.push({ fromMs: own.x, toMs: Math.min(end.x, view.atMs) })
  return [...named, ...blind.map((g) => ({ ...g, label: `no ratio ${hm(g.fromMs)} to ${hm(g.toMs)}` }))]
}
