import { type Look, panned, zoomed } from '../model/look.ts'

export interface Hands {
  now(): Look
  look(next: Look): void
  /** Time under a place on the canvas. */
  timeAt(clientX: number): number
  /** Where zooming by keys keeps its place. */
  about(): number
  /** Further keys. */
  readonly keys: Readonly<Record<string, () => void>>
  /** A press without a drag. */
  press?(tMs: number): void
}

/** Keys, wheel and drag on a trend: arrows and drag pan, + and − and the wheel zoom. */
export function trendHands(canvas: HTMLCanvasElement, h: Hands): void {
  const keys: Record<string, () => void> = {
    ArrowLeft: () => h.look(panned(h.now(), -0.15)),
    ArrowRight: () => h.look(panned(h.now(), 0.15)),
    '+': () => h.look(zoomed(h.now(), 0.5, h.about())),
    '=': () => h.look(zoomed(h.now(), 0.5, h.about())),
    '-': () => h.look(zoomed(h.now(), 2, h.about())),
    ...h.keys,
  }
  canvas.addEventListener('keydown', (event) => {
    const run = keys[event.key]
    if (run === undefined || event.ctrlKey || event.metaKey || event.altKey) return
    event.preventDefault()
    run()
  })
  canvas.addEventListener(
    'wheel',
    (event) => {
      event.preventDefault()
      h.look(zoomed(h.now(), event.deltaY > 0 ? 1.25 : 0.8, h.timeAt(event.clientX)))
    },
    { passive: false },
  )
  let drag: { readonly x: number; readonly from: Look; moved: boolean } | null = null
  canvas.addEventListener('pointerdown', (event) => {
    drag = { x: event.clientX, from: h.now(), moved: false }
    canvas.setPointerCapture(event.pointerId)
  })
  canvas.addEventListener('pointermove', (event) => {
    if (drag === null || (!drag.moved && Math.abs(event.clientX - drag.x) < 4)) return
    drag.moved = true
    h.look(panned(drag.from, (drag.x - event.clientX) / Math.max(1, canvas.clientWidth)))
  })
  canvas.addEventListener('pointercancel', () => {
    drag = null
  })
  canvas.addEventListener('pointerup', (event) => {
    if (drag !== null && !drag.moved) h.press?.(h.timeAt(event.clientX))
    drag = null
  })
}
