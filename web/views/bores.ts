import type { SkidFacts } from '../../server/wire/index.ts'
import { drawnShare } from '../model/bore.ts'
import type { RunData } from '../model/run-data.ts'
import { type Point, thin } from '../model/series.ts'
import { el } from './dom.ts'
import { onPalette, palette } from './palette.ts'
import { clamp } from './pen.ts'
import { gutterRem } from './trend-chart.ts'

const rowRem = 1.12
const hotRem = 1.75
const phaseRem = 1.4

/** The open bore of every segment through time, under the trend and on its time axis: one sees where and since when without reading a number. */
export function boresView(facts: SkidFacts, data: RunData) {
  const canvas = el('canvas', { class: 'bores', role: 'img' })
  let frame = 0
  let shown: {
    fromMs: number
    toMs: number
    atMs: number
    hot: string | null
    word: string
    rhythmMs: number
    times: number
  } | null = null

  function draw(): void {
    frame = 0
    if (shown === null) return
    const s = shown
    const look = palette()
    const em = look.rootPx
    const ratio = window.devicePixelRatio || 1
    const width = canvas.parentElement?.clientWidth ?? 0
    const height = em * (phaseRem + facts.segments.reduce((h, g) => h + (g.id === s.hot ? hotRem : rowRem), 0) + 0.3)
    if (width === 0) return
    canvas.width = Math.round(width * ratio)
    canvas.height = Math.round(height * ratio)
    canvas.style.width = `${width}px`
    canvas.style.height = `${height}px`
    const pen = canvas.getContext('2d')
    if (pen === null) return
    pen.scale(ratio, ratio)
    const left = gutterRem * em
    const right = width - 2
    const x = (t: number) => clamp(left + ((right - left) * (t - s.fromMs)) / (s.toMs - s.fromMs), left, right)
    const nowX = x(s.atMs)
    pen.textBaseline = 'middle'
    const word = (text: string, at: number, y: number, bold = false, align: CanvasTextAlign = 'left') => {
      pen.font = `${bold ? 700 : 400} ${1.0625 * em}px ${look.font}`
      pen.textAlign = align
      pen.fillText(text, at, y)
    }
    // Production or not.
    let y = 0
    const h = phaseRem * em - 3
    const holdMs = Math.max(2200 * facts.stepSeconds, s.rhythmMs)
    const made = stretches(data.production.points(), s.fromMs, s.atMs)
    for (const p of made) {
      const [l, r] = [x(p.fromMs), x(p.toMs)]
      pen.fillStyle = look.colour[p.on ? 'band' : 'paper']
      pen.fillRect(l, y, r - l, h)
      pen.fillStyle = look.colour[p.on ? 'band-edge' : 'rule']
      pen.fillRect(l, y, 3, h)
      pen.fillStyle = look.colour.ink
      pen.font = `400 ${1.0625 * em}px ${look.font}`
      const cut = p === made[0] && p.fromMs - s.fromMs < 0.03 * (s.toMs - s.fromMs) && s.fromMs > (data.detail.fromMs ?? 0)
      const text = !p.on ? 'not in production' : cut ? 'production' : `production since ${data.clock.hm(p.fromMs)}`
      const fits = [text, p.on ? 'production' : 'not'].find((t) => pen.measureText(t).width < r - l - em)
      if (fits !== undefined) word(fits, l + 0.5 * em, y + h / 2)
    }
    if (right - nowX > 4 * em) {
      pen.fillStyle = look.colour['ink-2']
      word('not yet', nowX + 0.5 * em, y + h / 2)
    }
    y += phaseRem * em
    for (const g of facts.segments) {
      const tall = g.id === s.hot
      const full = (tall ? hotRem : rowRem) * em
      const top = y + 1
      const size = full - 3
      const points = thin(
        (data.segments.get(g.id)?.ratio.points() ?? []).filter((p) => p.x >= s.fromMs && p.x <= s.atMs),
        600,
      )
      pen.fillStyle = look.colour[tall ? 'ink' : 'ink-2']
      pen.save()
      pen.beginPath()
      pen.rect(0, y, left - 0.3 * em, full)
      pen.clip()
      word(g.id, left - 0.6 * em, top + size / 2, tall, 'right')
      pen.restore()
      // Not known in production is hatched, never a bore that looks clean; out of production nothing is drawn.
      pen.fillStyle = look.hatch
      for (const p of made) if (p.on) pen.fillRect(x(p.fromMs), top, x(p.toMs) - x(p.fromMs), size)
      for (const run of runsOf(points)) {
        pen.fillStyle = look.colour.bore
        pen.fillRect(
          x(run[0]!.x),
          top,
          Math.max(1, (run.at(-1)!.x >= s.atMs - holdMs ? nowX : x(run.at(-1)!.x)) - x(run[0]!.x)),
          size,
        )
        pen.fillStyle = look.colour.deposit
        deposit(pen, run, x, top, size, s.times)
      }
      pen.strokeStyle = look.colour['band-edge']
      pen.lineWidth = 1
      pen.strokeRect(left + 0.5, top - 0.5, nowX - left, size + 1)
      if (tall && s.word !== '' && right - nowX > 9 * em) {
        pen.fillStyle = look.colour.ink
        word(s.word, nowX + 0.5 * em, top + size / 2)
      }
      y += full
    }
    canvas.dataset['segments'] = String(facts.segments.length)
  }
  const ask = (): void => {
    frame ||= requestAnimationFrame(draw)
  }
  const off = onPalette(ask)
  return {
    node: canvas,
    show(next: {
      fromMs: number
      toMs: number
      atMs: number
      hot: string | null
      word: string
      rhythmMs: number
      times: number
    }): void {
      shown = next
      canvas.setAttribute(
        'aria-label',
        `Open bore of ${facts.segments.length} segments through time. ${next.word === '' ? '' : `${next.hot} ${next.word}.`}`,
      )
      ask()
    },
    destroy(): void {
      off()
      cancelAnimationFrame(frame)
    },
  }
}

/** Runs of neighbouring points without a gap between them. */
function runsOf(points: readonly Point[]): Point[][] {
  const runs: Point[][] = []
  let open = false
  for (const p of points) {
    if (p.y === null || p.y <= 0) open = false
    else if (open) runs.at(-1)!.push(p)
    else {
      runs.push([p])
      open = true
    }
  }
  return runs
}

/** Layer on both walls, its thickness drawn larger than it is. */
function deposit(
  pen: CanvasRenderingContext2D,
  run: readonly Point[],
  x: (t: number) => number,
  top: number,
  size: number,
  times: number,
): void {
  if (!run.some((p) => (drawnShare(p.y, times) ?? 0) > 0)) return
  for (const [wall, side] of [
    [top, 1],
    [top + size, -1],
  ] as const) {
    pen.beginPath()
    pen.moveTo(x(run[0]!.x), wall)
    for (const p of run) pen.lineTo(x(p.x), wall + (side * (drawnShare(p.y, times) ?? 0) * size) / 2)
    pen.lineTo(x(run.at(-1)!.x), wall)
    pen.fill()
  }
}

/** Stretches of production and not, cut to the window. */
export function stretches(points: readonly Point[], fromMs: number, toMs: number): { fromMs: number; toMs: number; on: boolean }[] {
  const out: { fromMs: number; toMs: number; on: boolean }[] = []
  for (const p of points) {
    if (p.y === null || p.x > toMs) continue
    const on = p.y > 0
    const last = out.at(-1)
    if (last === undefined || last.on !== on) {
      if (last !== undefined) last.toMs = p.x
      out.push({ fromMs: p.x, toMs: p.x, on })
    } else last.toMs = p.x
  }
  const end = out.at(-1)
  if (end !== undefined && toMs - end.toMs < 120_000) end.toMs = toMs
  return out.filter((s) => s.toMs > fromMs && s.toMs > s.fromMs)
}
