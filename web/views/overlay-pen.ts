import type { Priority } from '../../server/core/report.ts'
import type { Overlay } from '../model/overlay.ts'
import type { Point } from '../model/series.ts'
import type { Palette } from './palette.ts'

export interface Box {
  readonly left: number
  readonly top: number
  readonly right: number
  readonly bottom: number
}
export interface Frame {
  readonly pen: CanvasRenderingContext2D
  readonly box: Box
  readonly x: (tMs: number) => number
  readonly y: (value: number) => number
  readonly look: Palette
  /** Labels already placed. */
  readonly taken: Box[]
}

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

function words(f: Frame, o: Overlay, last: Point | null): void {
  const { box, look } = f
  const em = look.rootPx
  const inside = (x: number) => x >= box.left && x <= box.right
  if (o.fan !== null) {
    const x = clamp((f.x(o.fan.lowMs) + f.x(o.fan.highMs)) / 2, box.left, box.right)
    if (f.x(o.fan.lowMs) <= box.right) label(f, o.fan.label, x, f.y(o.fan.limit) - 0.4 * em, 'center', 'up', { bold: true })
  }
  if (last?.y != null && o.nowLabel !== null && inside(f.x(last.x)))
    label(f, o.nowLabel, f.x(last.x) - 0.7 * em, f.y(last.y) - 0.5 * em, 'right', 'up', { bold: true })
  if (o.onset !== null) {
    const y = box.bottom - 0.6 * em
    const l = f.x(o.onset.lowMs)
    const r = f.x(o.onset.highMs)
    if (r >= box.left && l <= box.right) {
      if (!label(f, o.onset.label, l - 0.5 * em, y, 'right', 'middle')) label(f, o.onset.label, r + 0.6 * em, y, 'left', 'middle')
    }
  }
  for (const l of o.limits) {
    const step = [...l.steps].reverse().find((s) => s.value !== null)
    if (step === undefined || step.value === null) continue
    const y = f.y(step.value)
    const below = l.side === 1 ? 'down' : 'up'
    const at = Math.max(box.left, f.x(step.fromMs)) + 0.5 * em
    if (y < box.top || y > box.bottom) {
      const off = y < box.top
      const text = `${l.label}, ${off ? 'above' : 'below'} this range`
      label(f, text, box.left + 0.6 * em, off ? box.top + 0.2 * em : box.bottom - 0.2 * em, 'left', off ? 'down' : 'up', {
        soft: true,
      })
      continue
    }
    if (!label(f, l.label, at, y + l.side * 0.25 * em, 'left', below))
      label(f, l.label, box.right - 0.5 * em, y + l.side * 0.25 * em, 'right', below)
  }
  for (const b of o.bands) {
    const y = f.y(b.high) - 0.3 * em
    if (!label(f, b.label, Math.max(box.left, f.x(b.fromMs)) + 0.6 * em, y, 'left', 'up', { soft: true }))
      label(f, b.label, Math.max(box.left, f.x(b.fromMs)) + 0.6 * em, f.y(b.low) + 0.3 * em, 'left', 'down', { soft: true })
  }
  for (const g of o.gaps) {
    const l = f.x(g.fromMs)
    const r = f.x(g.toMs)
    if (r < box.left || l > box.right) continue
    const y = box.top + 0.42 * (box.bottom - box.top)
    if (!label(f, g.label, l - 0.4 * em, y, 'right', 'middle', { soft: true }))
      label(f, g.label, r + 0.4 * em, y, 'left', 'middle', { soft: true })
  }
  for (const n of o.notes) {
    const x = f.x(n.tMs)
    if (!inside(x)) continue
    // From the middle outwards, so that the words miss the line and the limits where they can.
    for (const share of [0.3, 0.5, 0.15, 0.7]) {
      const y = box.top + share * (box.bottom - box.top)
      if (label(f, n.label, x + 0.4 * em, y, 'left', 'middle') || label(f, n.label, x - 0.4 * em, y, 'right', 'middle')) break
    }
  }
}

type Side = 'left' | 'right' | 'center'
/** Words on a patch of ground, where they neither leave the chart nor cover others. False where there is no room. */
export function label(
  f: Frame,
  text: string,
  x: number,
  y: number,
  align: Side,
  grow: 'up' | 'down' | 'middle',
  how: { bold?: boolean; soft?: boolean } = {},
): boolean {
  const { pen, box, look } = f
  const size = 1.0625 * look.rootPx
  pen.font = `${how.bold === true ? 700 : 400} ${size}px ${look.font}`
  const w = pen.measureText(text).width
  let left = align === 'left' ? x : align === 'right' ? x - w : x - w / 2
  if (align === 'center') left = clamp(left, box.left + 4, box.right - w - 4)
  const top = grow === 'down' ? y : grow === 'up' ? y - size : y - size / 2
  const room: Box = { left: left - 3, right: left + w + 3, top, bottom: top + size * 1.1 }
  if (room.left < box.left || room.right > box.right || room.top < box.top || room.bottom > box.bottom + 2) return false
  if (f.taken.some((t) => t.left < room.right && t.right > room.left && t.top < room.bottom && t.bottom > room.top)) return false
  f.taken.push(room)
  pen.globalAlpha = 0.8
  pen.fillStyle = look.colour.sheet
  pen.fillRect(room.left, room.top, room.right - room.left, room.bottom - room.top)
  pen.globalAlpha = 1
  pen.fillStyle = look.colour[how.soft === true ? 'ink-2' : 'ink']
  pen.textAlign = 'left'
  pen.textBaseline = 'middle'
  pen.fillText(text, left, top + size * 0.55)
  return true
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

function clip(f: Frame): void {
  f.pen.beginPath()
  f.pen.rect(f.box.left, f.box.top, f.box.right - f.box.left, f.box.bottom - f.box.top)
  f.pen.clip()
}

function line(
  f: Frame,
  points: readonly (readonly [number, number])[],
  colour: keyof Palette['colour'],
  width: number,
  dash: number[] = [],
): void {
  const { pen } = f
  pen.strokeStyle = f.look.colour[colour]
  pen.lineWidth = width
  pen.setLineDash(dash)
  pen.beginPath()
  for (const [i, [x, y]] of points.entries()) pen[i === 0 ? 'moveTo' : 'lineTo'](x, y)
  pen.stroke()
  pen.setLineDash([])
}

function dot(f: Frame, x: number, y: number, r: number): void {
  f.pen.fillStyle = f.look.colour.ink
  f.pen.beginPath()
  f.pen.arc(x, y, r, 0, 2 * Math.PI)
  f.pen.fill()
}

export const clamp = (v: number, low: number, high: number): number => Math.min(high, Math.max(low, v))
