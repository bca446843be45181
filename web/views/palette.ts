/** Colours and sizes of the style sheet, for canvases. Read once, again after `refresh`. */
const names = [
  'paper',
  'sheet',
  'ink',
  'ink-2',
  'rule',
  'wall',
  'bore',
  'deposit',
  'band',
  'band-edge',
  'fan',
  'fan-edge',
  'line-2',
  'hatch',
  'hatch-bg',
  'high',
  'high-edge',
  'med',
  'med-edge',
  'low',
  'low-edge',
] as const
export type Colour = (typeof names)[number]
export interface Palette {
  readonly colour: Readonly<Record<Colour, string>>
  readonly rootPx: number
  readonly font: string
  readonly hatch: CanvasPattern | string
}

let now: Palette | null = null
const listeners = new Set<() => void>()

export function palette(): Palette {
  if (now !== null) return now
  const style = getComputedStyle(document.documentElement)
  const colour = Object.fromEntries(names.map((n) => [n, style.getPropertyValue(`--${n}`).trim()])) as Record<Colour, string>
  const rootPx = Number.parseFloat(style.fontSize) || 16
  now = { colour, rootPx, font: style.getPropertyValue('--font').trim(), hatch: hatchOf(colour, rootPx) }
  return now
}

/** The theme or the size of the window changed. */
export function refreshPalette(): void {
  now = null
  for (const f of listeners) f()
}
export function onPalette(run: () => void): () => void {
  listeners.add(run)
  return () => listeners.delete(run)
}

/** Diagonal strokes: not known. Never used for anything else. */
function hatchOf(colour: Readonly<Record<Colour, string>>, rootPx: number): CanvasPattern | string {
  const size = Math.max(6, Math.round(rootPx / 2))
  const tile = document.createElement('canvas')
  tile.width = size
  tile.height = size
  const pen = tile.getContext('2d')
  if (pen === null) return colour['hatch-bg']
  pen.fillStyle = colour['hatch-bg']
  pen.fillRect(0, 0, size, size)
  pen.strokeStyle = colour.hatch
  pen.lineWidth = Math.max(1, rootPx / 10)
  pen.beginPath()
  for (const shift of [-size, 0, size]) {
    pen.moveTo(shift - 1, size + 1)
    pen.lineTo(shift + size + 1, -1)
  }
  pen.stroke()
  return pen.createPattern(tile, 'repeat') ?? colour['hatch-bg']
}
