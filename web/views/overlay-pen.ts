import type { Priority } from '../../server/core/report.ts'
import type { Overlay } from '../model/overlay.ts'
import type { Point } from '../model/series.ts'
import { words } from './overlay-words.ts'
import { clamp, clip, dot, type Frame, line } from './pen.ts'

/** Below the lines: ground, baseline band, forecast, limits, what is not known. */
export function drawUnder(f: Frame, o: Overlay): void {
  const { pen, box, look } = f
  const nowX = clamp(f.x(o.nowMs), box.left, box.right)
  pen.save()
  pen.fillStyle = look.colour.sheet
  pen.fillRect(box.left, box.top, nowX - box.left, box.bottom - box.top)
  clip(f)
  for (const b of o.bands) {
    const [l, r] = [f.x(b.fromMs), f.x(b.toMs)]
    pen.fillStyle = look.colour.band
    pen.fillRect(l, f.y(b.high), r - l, f.y(b.low) - f.y(b.high))
    line(
      f,
      [
        [l, f.y(b.high)],
        [r, f.y(b.high)],
      ],
      'band-edge',
      1,
    )
    line(
      f,
      [
        [l, f.y(b.low)],
        [r, f.y(b.low)],
      ],
      'band-edge',
      1,
    )
  }
  if (o.fan !== null) {
    const edge = (points: readonly Point[]) => points.map((p): [number, number] => [f.x(p.x), f.y(p.y ?? 0)])
    const [low, high] = [edge(o.fan.low), edge(o.fan.high)]
    pen.fillStyle = look.colour.fan
    pen.beginPath()
    for (const [i, p] of [...low, ...high.reverse()].entries()) pen[i === 0 ? 'moveTo' : 'lineTo'](p[0], p[1])
    pen.fill()
    line(f, edge(o.fan.mid), 'line-2', 2)
    line(f, low, 'fan-edge', 2, [6, 4])
    line(f, high, 'fan-edge', 2, [6, 4])
  }
  for (const l of o.limits) limit(f, l.steps, l.side)
  if (o.fan !== null)
    line(
      f,
      [
        [f.x(o.fan.lowMs), f.y(o.fan.limit)],
        [f.x(o.fan.highMs), f.y(o.fan.limit)],
      ],
      'ink',
      look.rootPx / 3,
    )
  for (const g of o.gaps) {
    const l = Math.min(f.x(g.fromMs), nowX)
    const r = Math.min(f.x(g.toMs), nowX)
    pen.fillStyle = look.hatch
    pen.fillRect(l, box.top, Math.max(r - l, r > l ? 2 : 0), box.bottom - box.top)
  }
  pen.restore()
}

/** Above the lines: onset, alarms, now, and every word. */
export function drawOver(f: Frame, o: Overlay, last: Point | null): void {
  const { pen, box, look } = f
  const em = look.rootPx
  pen.save()
  clip(f)
  if (o.cursorMs !== null)
    line(
      f,
      [
        [f.x(o.cursorMs), box.top],
        [f.x(o.cursorMs), box.bottom],
      ],
      'ink-2',
      1,
    )
  if (o.onset !== null) {
    const y = box.bottom - 0.6 * em
    const [l, at, r] = [f.x(o.onset.lowMs), f.x(o.onset.atMs), f.x(o.onset.highMs)]
    line(
      f,
      [
        [l, y],
        [r, y],
      ],
      'ink',
      2,
    )
    for (const x of [l, r])
      line(
        f,
        [
          [x, y - 0.3 * em],
          [x, y + 0.3 * em],
        ],
        'ink',
        2,
      )
    line(
      f,
      [
        [at, y],
        [at, y - 2.6 * em],
      ],
      'ink',
      2,
    )
    dot(f, at, y, 0.24 * em)
  }
  for (const n of o.notes)
    line(
      f,
      [
        [f.x(n.tMs), box.top],
        [f.x(n.tMs), box.bottom],
      ],
      'fan-edge',
      1,
      [3, 3],
    )
  const nowX = f.x(o.nowMs)
  line(
    f,
    [
      [nowX, box.top],
      [nowX, box.bottom],
    ],
    'ink',
    0.1875 * em,
  )
  if (last?.y != null) dot(f, f.x(last.x), f.y(last.y), 0.4 * em)
  pen.restore()
  for (const a of o.alarms) {
    const x = f.x(a.tMs)
    if (x >= box.left && x <= box.right) flag(f, x, a.priority)
  }
  words(f, o, last)
}

/** A limit with its strokes on the side that is not allowed; changes are steps. */
function limit(f: Frame, steps: Overlay['limits'][number]['steps'], side: 1 | -1): void {
  const em = f.look.rootPx
  for (const [i, s] of steps.entries()) {
    const next = steps[i + 1]
    const l = Math.max(f.box.left, f.x(s.fromMs))
    const r = next === undefined ? f.box.right : Math.min(f.box.right, f.x(next.fromMs))
    if (s.value === null || r <= l) continue
    const y = f.y(s.value)
    line(
      f,
      [
        [l, y],
        [r, y],
      ],
      'ink',
      2,
    )
    for (let x = Math.ceil(l / (1.3 * em)) * 1.3 * em; x < r; x += 1.3 * em)
      line(
        f,
        [
          [x, y],
          [x + 0.45 * em, y - side * 0.55 * em],
        ],
        'ink',
        1,
      )
    if (next !== undefined && next.value !== null && f.x(next.fromMs) <= f.box.right)
      line(
        f,
        [
          [r, y],
          [r, f.y(next.value)],
        ],
        'ink',
        2,
      )
  }
}

/** The alarm's teeth and colour at the moment it was raised, on the lower edge. */
function flag(f: Frame, x: number, priority: Priority): void {
  const { pen, box, look } = f
  const p = priority === 'medium' ? 'med' : priority
  const h = 0.85 * look.rootPx
  const w = 1.5 * h
  const teeth = p === 'high' ? 3 : p === 'med' ? 2 : 1
  const top = box.bottom + 1
  pen.beginPath()
  pen.moveTo(x + 0.35 * h, top)
  pen.lineTo(x + w, top)
  pen.lineTo(x + w, top + h)
  pen.lineTo(x + 0.35 * h, top + h)
  for (let i = teeth - 1; i >= 0; i--) {
    pen.lineTo(x, top + ((i + 0.5) * h) / teeth)
    pen.lineTo(x + 0.35 * h, top + (i * h) / teeth)
  }
  pen.closePath()
  pen.fillStyle = look.colour[p]
  pen.strokeStyle = look.colour[`${p}-edge`]
  pen.lineWidth = 1.5
  pen.fill()
  pen.stroke()
}
