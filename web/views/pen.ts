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

export function clip(f: Frame): void {
  f.pen.beginPath()
  f.pen.rect(f.box.left, f.box.top, f.box.right - f.box.left, f.box.bottom - f.box.top)
  f.pen.clip()
}

export function line(
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

export function dot(f: Frame, x: number, y: number, r: number): void {
  f.pen.fillStyle = f.look.colour.ink
  f.pen.beginPath()
  f.pen.arc(x, y, r, 0, 2 * Math.PI)
  f.pen.fill()
}

export const clamp = (v: number, low: number, high: number): number => Math.min(high, Math.max(low, v))
