import type { Overlay } from '../model/overlay.ts'
import type { Point } from '../model/series.ts'
import { type Box, clamp, type Frame } from './pen.ts'

/** Every word of a chart, in order of importance: a later one gives way. */
export function words(f: Frame, o: Overlay, last: Point | null): void {
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
