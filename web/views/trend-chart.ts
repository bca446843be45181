import { Chart, type ChartDataset, LinearScale, LineController, LineElement, type Plugin, PointElement } from 'chart.js'
import { emptyOverlay, type Line, type TrendSpec } from '../model/overlay.ts'
import { type Point, thin } from '../model/series.ts'
import { timeTicks, valueTicks } from '../model/ticks.ts'
import { drawOver, drawUnder } from './overlay-pen.ts'
import { label } from './overlay-words.ts'
import { onPalette, palette } from './palette.ts'
import type { Frame } from './pen.ts'

Chart.register(LineController, LineElement, PointElement, LinearScale)

/** Left of every time picture there is so much room for figures, so that charts and strips below each other share their time axis. */
export const gutterRem = 4.4
const most = 1000
const dashes: readonly number[][] = [[], [7, 4], [2, 4], [9, 3, 2, 3], [1, 3]]

/** A trend over time with limits, bands, forecast and gaps. Draws at most once a frame; knows nothing of sockets or alarms. */
export function trendChart(canvas: HTMLCanvasElement) {
  let spec: TrendSpec | null = null
  let cursorMs: number | null = null
  let frame = 0
  const ask = (): void => {
    frame ||= requestAnimationFrame(() => draw())
  }
  const overlay: Plugin<'line'> = {
    id: 'overlay',
    beforeDatasetsDraw(chart) {
      const f = frameOf(chart)
      drawUnder(f, spec?.overlay ?? emptyOverlay(0))
      for (const d of chart.data.datasets) extremes(f, d.data as unknown as readonly Point[])
    },
    afterDatasetsDraw(chart) {
      if (spec === null) return
      const f = frameOf(chart)
      const main = spec.lines.find((l) => l.look === 'main')
      const last =
        main === undefined ? null : ([...main.points].reverse().find((p) => p.y !== null && p.x <= spec!.overlay.nowMs) ?? null)
      drawOver(f, { ...spec.overlay, cursorMs }, spec.overlay.nowLabel === null ? null : last)
      if (spec.lines.length > 1) for (const l of spec.lines) nameOf(f, l)
    },
  }
  const chart = new Chart<'line'>(canvas, {
    type: 'line',
    data: { datasets: [] },
    plugins: [overlay],
    options: {
      animation: false,
      parsing: false,
      normalized: true,
      responsive: true,
      maintainAspectRatio: false,
      spanGaps: false,
      events: [],
      // How many ticks there is room for hangs on the width.
      onResize: () => ask(),
      layout: { padding: { top: 2, right: 2 } },
      scales: { x: { type: 'linear' }, y: { type: 'linear' } },
    },
  })

  function draw(): void {
    frame = 0
    if (spec === null) return
    const s = spec
    const look = palette()
    const font = { size: 1.0625 * look.rootPx, family: look.font }
    chart.data.datasets = s.lines.map((l, i) => {
      const points = visible(l.points, s.fromMs, Math.min(s.toMs, s.overlay.nowMs))
      return {
        label: `${l.name} ${s.yTitle}`,
        data: [...thin(points, most)] as unknown as ChartDataset<'line'>['data'],
        pointRadius: 0,
        borderColor: look.colour[l.look === 'main' ? 'ink' : 'line-2'],
        borderWidth: 0.125 * look.rootPx,
        borderDash: l.look === 'main' ? [] : (dashes[i % dashes.length] ?? []),
        tension: 0,
      }
    })
    const axis = { grid: { display: false }, border: { color: look.colour.rule } }
    const room = Math.max(2, Math.floor((chart.width - gutterRem * look.rootPx) / (6.5 * look.rootPx)))
    chart.options.scales = {
      x: {
        ...axis,
        type: 'linear',
        min: s.fromMs,
        max: s.toMs,
        title: {
          display: true,
          align: 'end',
          padding: 0,
          text: `time of day, ${s.zone} (${s.clock.offset(s.overlay.nowMs)})`,
          color: look.colour['ink-2'],
          font,
        },
        afterBuildTicks: (scale) => {
          // None so near the right end that its label would be cut.
          const end = s.toMs - ((s.toMs - s.fromMs) * 1.6 * look.rootPx) / Math.max(1, chart.width - gutterRem * look.rootPx)
          scale.ticks = timeTicks(s.fromMs, end, room, s.clock).map((t) => ({ value: t.at, label: t.label }))
        },
        afterFit: (scale) => {
          const box = scale as unknown as { paddingLeft: number; paddingRight: number }
          box.paddingLeft = 0
          box.paddingRight = 0
        },
        ticks: {
          color: look.colour.ink,
          font,
          maxRotation: 0,
          autoSkip: false,
          padding: 0.5 * look.rootPx,
          callback: (_v, _i, ticks) => ticks[_i]?.label as string,
        },
      },
      y: {
        ...axis,
        type: 'linear',
        min: s.low,
        max: s.high,
        title: { display: true, text: s.yTitle, color: look.colour['ink-2'], font, padding: 0 },
        afterBuildTicks: (scale) => {
          const rows = Math.max(3, Math.floor(chart.height / (2.8 * look.rootPx)))
          scale.ticks = valueTicks(s.low, s.high, rows).map((t) => ({ value: t.at, label: t.label }))
        },
        afterFit: (scale) => {
          scale.width = gutterRem * look.rootPx
        },
        ticks: { color: look.colour['ink-2'], font, autoSkip: false, callback: (_v, i, ticks) => ticks[i]?.label as string },
      },
    }
    chart.update('none')
    canvas.dataset['points'] = String(s.lines.reduce((n, l) => n + l.points.length, 0))
    canvas.dataset['yTitle'] = s.yTitle
    canvas.dataset['xTitle'] = `time of day, ${s.zone}`
    canvas.dataset['gaps'] = String(s.overlay.gaps.length)
    canvas.dataset['fan'] = String(s.overlay.fan !== null && s.overlay.fan.mid.length > 0)
    canvas.dataset['onset'] = s.overlay.onset === null ? '' : String(s.overlay.onset.atMs)
    canvas.dataset['limits'] = String(s.overlay.limits.reduce((n, l) => n + l.steps.length, 0))
    canvas.dataset['from'] = String(s.fromMs)
    canvas.dataset['to'] = String(s.toMs)
  }
  const off = onPalette(ask)

  return {
    show(next: TrendSpec): void {
      spec = next
      ask()
    },
    /** Marks a moment, or none. */
    point(tMs: number | null): void {
      if (tMs === cursorMs) return
      cursorMs = tMs
      ask()
    },
    /** Time under a place on the canvas, by client x. */
    timeAt(clientX: number): number {
      const scale = chart.scales['x']
      return scale === undefined ? 0 : (scale.getValueForPixel(clientX - canvas.getBoundingClientRect().left) ?? 0)
    },
    destroy(): void {
      cancelAnimationFrame(frame)
      off()
      chart.destroy()
    },
  }

  function nameOf(f: Frame, l: Line): void {
    const last = [...l.points].reverse().find((p) => p.y !== null && p.x <= Math.min(spec!.overlay.nowMs, spec!.toMs))
    if (last?.y == null || last.x < spec!.fromMs) return
    const em = f.look.rootPx
    const x = Math.min(f.x(last.x), f.box.right) - 0.6 * em
    for (const dy of [-0.75, 0.85, -1.8, 1.9, -2.9, 3])
      if (label(f, l.name, x, f.y(last.y) + dy * em, 'right', 'middle', { bold: l.look === 'main' })) return
  }
}
export type TrendChart = ReturnType<typeof trendChart>

function frameOf(chart: Pick<Chart<'line'>, 'chartArea' | 'scales' | 'ctx'>): Frame {
  const { left, top, right, bottom } = chart.chartArea
  const sx = chart.scales['x']!
  const sy = chart.scales['y']!
  return {
    pen: chart.ctx,
    box: { left, top, right, bottom },
    x: (t) => sx.getPixelForValue(t),
    y: (v) => sy.getPixelForValue(v),
    look: palette(),
    taken: [],
  }
}

/** From least to greatest value of each bucket, behind the line of means. */
function extremes(f: Frame, points: readonly Point[]): void {
  const { pen, box } = f
  pen.save()
  pen.beginPath()
  pen.rect(box.left, box.top, box.right - box.left, box.bottom - box.top)
  pen.clip()
  pen.strokeStyle = f.look.colour['line-2']
  pen.lineWidth = 1
  pen.beginPath()
  for (const p of points) {
    if (p.y === null || p.low == null || p.high == null || !(p.high > p.low)) continue
    pen.moveTo(f.x(p.x), f.y(p.low))
    pen.lineTo(f.x(p.x), f.y(p.high))
  }
  pen.stroke()
  pen.restore()
}

/** The points of the window and one beyond each end, so that lines run to the edge. */
function visible(points: readonly Point[], fromMs: number, toMs: number): readonly Point[] {
  let i = points.findIndex((p) => p.x >= fromMs)
  if (i < 0) return []
  i = Math.max(0, i - 1)
  let j = points.length
  while (j > i && points[j - 1]!.x > toMs) j--
  return points.slice(i, j)
}
