import type { AlarmRow, LiveState, SegmentState, SkidFacts } from '../../server/wire/index.ts'
import { drawnShare, limitRatioOf } from '../model/bore.ts'
import { fixed } from '../model/format.ts'
import { type LineLayout, mainHalf, type PlacedSegment, profileHeight, wall } from '../model/line-layout.ts'
import { el, place, svg } from './dom.ts'
import { shortOf } from './mark.ts'

const rect = (x0: number, y0: number, x1: number, y1: number, cls: string): SVGElement =>
  svg('path', { ...(cls === 'k-hatch' ? { fill: 'url(#not-known)' } : { class: cls }), d: `M${x0} ${y0}H${x1}V${y1}H${x0}Z` })
/** A length across that looks like `px` design pixels along. */
const dx = (px: number): number => (px * 1000) / 1380

/** Bodies, pipes and arrows. */
export function drawStill(g: SVGElement, layout: LineLayout): void {
  const pipe = 7
  const walls: SVGElement[] = []
  const bores: SVGElement[] = []
  const arrows: SVGElement[] = []
  const add = (x0: number, y0: number, x1: number, y1: number) => {
    const horizontal = Math.abs(y1 - y0) < 0.01
    const [wx, wy] = horizontal ? [0, pipe + wall - 2] : [dx(pipe + wall - 2), 0]
    const [bx, by] = horizontal ? [0, pipe] : [dx(pipe), 0]
    walls.push(rect(x0 - wx, y0 - wy, x1 + wx, y1 + wy, 'k-wall'))
    bores.push(rect(x0 - bx, y0 - by, x1 + bx, y1 + by, 'k-bore'))
  }
  for (const row of layout.rows) {
    walls.push(rect(row.x0, row.y - mainHalf - wall, row.x1, row.y + mainHalf + wall, 'k-wall'))
    bores.push(rect(row.x0, row.y - mainHalf, row.x1, row.y + mainHalf, 'k-bore'))
    add(row.x0 - 24, row.y, row.x0 + 2, row.y)
    add(row.x1 - 2, row.y, 1000, row.y)
    arrows.push(arrow(row.x1 + 40, row.y), arrow(row.x0 - 21, row.y))
  }
  for (const f of layout.feeds) {
    if (f.joinX === null || f.y === f.joinY) continue
    add(f.x, f.y, f.joinX, f.y)
    walls.push(
      rect(f.joinX - dx(pipe + wall - 2), f.y - pipe - wall + 2, f.joinX + dx(pipe + wall - 2), f.joinY - mainHalf, 'k-wall'),
    )
    bores.push(rect(f.joinX - dx(pipe), f.y - pipe, f.joinX + dx(pipe), f.joinY - mainHalf + 4, 'k-bore'))
    arrows.push(arrow(f.x + 4, f.y))
  }
  for (const s of layout.segments)
    if (!s.main) {
      walls.push(rect(s.x, s.y - s.half - wall, s.x + s.w, s.y + s.half + wall, 'k-wall'))
      bores.push(rect(s.x, s.y - s.half, s.x + s.w, s.y + s.half, 'k-bore'))
    }
  g.append(...walls, ...bores, ...arrows)
}

const arrow = (x: number, y: number): SVGElement =>
  svg('path', { class: 'k-wall', d: `M${x} ${y - 5}L${x + dx(9)} ${y}L${x} ${y + 5}Z` })

/** Deposit, the dots where it would be at its limit, an alarm's bars; hatched where the ratio is not known. */
export function drawSegment(
  g: SVGElement,
  s: PlacedSegment,
  now: SegmentState | undefined,
  times: number,
  alarm: AlarmRow | null,
): void {
  const share = drawnShare(now?.ratio, times)
  const end = s.x + s.w
  const e = Math.min(dx(10), s.w / 4)
  if (share === null) g.append(rect(s.x, s.y - s.half, end, s.y + s.half, 'k-hatch'))
  else if (share > 0)
    for (const side of [-1, 1]) {
      const [at, to] = [s.y + side * s.half, s.y + side * s.half * (1 - share)]
      g.append(svg('path', { class: 'k-dep', d: `M${s.x} ${at}L${s.x + e} ${to}H${end - e}L${end} ${at}Z` }))
    }
  const limit = now === undefined ? null : limitRatioOf(now)
  const atLimit = limit === null ? null : drawnShare(limit, times)
  if (atLimit !== null)
    for (const side of [-1, 1])
      g.append(svg('path', { class: 's-room', d: `M${s.x + e} ${s.y + side * s.half * (1 - atLimit)}H${end - e}` }))
  for (const x of [s.x, end]) g.append(svg('path', { class: 's-line', d: `M${x} ${s.y + s.half + wall}v7` }))
  const hot = alarm?.active === true ? alarm.priority : undefined
  if (hot !== undefined)
    for (const side of [-1, 1]) {
      const a = s.y + side * (s.half + wall + 2)
      g.append(svg('path', { class: `k-${shortOf(hot)} e-${shortOf(hot)}`, d: `M${s.x} ${a}H${end}V${a + side * 8}H${s.x}Z` }))
    }
}

/** Temperatures along one row, each at its place in its segment; a bad one is hatched and named. */
export function drawProfile(
  g: SVGElement,
  words: HTMLElement,
  layout: LineLayout,
  row: LineLayout['rows'][number],
  facts: SkidFacts,
  state: LiveState,
): void {
  const mine = layout.segments.filter((s) => s.main && layout.rows[s.row] === row)
  const points = mine.map((s) => {
    const spec = facts.segments.find((f) => f.id === s.id)!
    const n = spec.temperatures.length
    return {
      s,
      readings: spec.temperatures.map((tag, i) => {
        const t = state.tags.find((x) => x.tag === tag)
        const usable = t !== undefined && t.quality !== 'bad' && t.quality !== 'none'
        return {
          tag,
          x: n === 1 ? s.x + s.w - 4 : s.x + 4 + ((s.w - 8) * i) / (n - 1),
          tempC: usable && t.unit === 'degC' ? t.value : null,
          why: t?.reason ?? 'no reading',
        }
      }),
    }
  })
  const known = points.flatMap((p) => p.readings.map((r) => r.tempC)).filter((t) => t !== null)
  if (known.length === 0) return
  const step = Math.max(...known) - Math.min(...known) > 60 ? 40 : 20
  const low = Math.floor(Math.min(...known) / step) * step
  const high = Math.max(low + step, Math.ceil(Math.max(...known) / step) * step)
  const top = row.profileY
  const y = (c: number) => top + profileHeight * (1 - (c - low) / (high - low))
  for (let c = low; c <= high; c += step) {
    g.append(svg('path', { class: 's-axis', d: `M112 ${y(c)}H${row.x1}` }))
    words.append(
      place(el('span', { class: 'lab rm soft', text: `${c > 0 ? '+' : ''}${fixed(c, 0)}${c === high ? ' °C' : ''}` }), {
        x: 10.8,
        y: (100 * y(c)) / layout.height,
      }),
    )
  }
  for (const p of points) {
    let pen = ''
    let d = ''
    for (const r of p.readings) {
      if (r.tempC === null) {
        g.append(rect(r.x - 14, top, r.x + 14, top + profileHeight, 'k-hatch'))
        words.append(
          place(el('span', { class: 'lab cm on', title: r.why, text: `${r.tag} bad` }), {
            x: r.x / 10,
            y: (100 * (top + profileHeight / 2)) / layout.height,
          }),
        )
        pen = ''
        continue
      }
      d += `${pen === '' ? 'M' : 'L'}${r.x} ${y(r.tempC)}`
      pen = 'L'
    }
    g.append(svg('path', { class: 's-thin', d }))
    for (const r of p.readings) if (r.tempC !== null) g.append(svg('path', { class: 's-dot', d: `M${r.x} ${y(r.tempC)}h.01` }))
    const hot = p.readings.reduce<(typeof p.readings)[number] | null>(
      (t, r) => (r.tempC !== null && (t?.tempC == null || r.tempC > t.tempC) ? r : t),
      null,
    )
    if (hot?.tempC != null && p.readings.length > 2)
      words.append(
        place(
          el(
            'span',
            { class: `lab ${p.readings[0] === hot ? 'lb' : p.readings.at(-1) === hot ? 'rb' : 'cb'}` },
            el('b', { text: `${fixed(hot.tempC, 1)} °C` }),
            ` ${hot.tag}`,
          ),
          {
            x: hot.x / 10,
            y: (100 * (y(hot.tempC) - 8)) / layout.height,
          },
        ),
      )
  }
}
