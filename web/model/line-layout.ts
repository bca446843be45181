import type { SegmentFacts, SkidFacts } from '../../server/wire/index.ts'

/** A segment in the drawing; x and w in thousandths of the width, y its middle in design pixels. */
export interface PlacedSegment {
  readonly id: string
  readonly title: string
  readonly main: boolean
  readonly row: number
  readonly x: number
  readonly w: number
  readonly y: number
  /** Half the height of its clean bore. */
  readonly half: number
}

export interface PlacedFeed {
  /** Streams that enter here. */
  readonly streams: readonly string[]
  /** Right end of the label, and where the pipe begins. */
  readonly x: number
  readonly y: number
  /** Where the pipe ends: straight into the body (null) or down into it at this x. */
  readonly joinX: number | null
  readonly joinY: number
  /** Little room for its label: the name alone. */
  readonly tight: boolean
  readonly row: number
}

export interface Row {
  /** Body of the main path: from x0 to x1 at height y. */
  readonly x0: number
  readonly x1: number
  readonly y: number
  readonly figuresY: number
  readonly profileY: number
  readonly last: boolean
}

export interface LineLayout {
  readonly height: number
  readonly rows: readonly Row[]
  readonly segments: readonly PlacedSegment[]
  readonly feeds: readonly PlacedFeed[]
}

export const mainHalf = 34
export const feedHalf = 15
export const wall = 8
export const profileHeight = 66
const x0 = 118
const x1 = 906
const gap = 30
const leastShare = 0.09
/** No segment of the main path is narrower than its figures. */
const leastW = 76
const mostInRow = 7
const feedW = 112
const labelW = 132
const shortLabelW = 78

/**
 * Places the segments of a skid for the drawing of the line: main path left to right, widths by share of residence with a minimum, feeds above
 * with pipes down to where they join. Past seven segments the path breaks into two rows. Streams without a segment of their own enter where
 * the first segment that carries them begins.
 */
export function layoutLine(facts: SkidFacts): LineLayout {
  const main = facts.segments.filter((s) => s.main)
  const body = main.length === 0 ? [...facts.segments] : main
  const cut = body.length > mostInRow ? [body.slice(0, Math.ceil(body.length / 2)), body.slice(Math.ceil(body.length / 2))] : [body]
  const segments: PlacedSegment[] = []
  const feeds: PlacedFeed[] = []
  const rows: Row[] = []
  let top = 0
  cut.forEach((part, row) => {
    const joins = joinsOf(facts, body, part)
    const levels = Math.max(0, ...joins.map((j) => j.branches.length))
    const y = top + levels * 100 + mainHalf + wall + (levels === 0 ? 16 : 40)
    const placed = widths(part)
    for (const [i, s] of part.entries())
      segments.push({ id: s.id, title: s.title, main: true, row, ...placed[i]!, y, half: mainHalf })
    // Feeds from right to left, so that each ends before the one on its right begins.
    const free = Array.from({ length: levels }, () => 1000)
    for (const join of [...joins].reverse()) {
      const at = placed[join.index]!
      const joinX = join.index === 0 ? null : at.x - gap / 2
      const left = joins[joins.indexOf(join) - 1]
      const before = left === undefined || left.index === 0 ? 0 : placed[left.index]!.x - gap / 2
      join.branches.forEach((branch, level) => {
        const n = branch.segments.length
        const yFeed = y - mainHalf - wall - 62 - level * 100
        const end = Math.min((joinX ?? at.x + 60) - 20, free[level]! - 16)
        const w =
          n === 0 ? 0 : Math.max(56, Math.min(feedW, (end - Math.max(before + 14, 0) - 26 - shortLabelW - (n - 1) * 12) / n))
        const begin = end - n * w - Math.max(0, n - 1) * 12
        for (const [i, s] of branch.segments.entries())
          segments.push({ id: s.id, title: s.title, main: false, row, x: begin + i * (w + 12), w, y: yFeed, half: feedHalf })
        feeds.push({
          streams: branch.streams,
          x: begin - 26,
          y: yFeed,
          joinX: joinX ?? at.x + 60,
          joinY: y,
          row,
          tight: begin - 26 - labelW - 50 < before,
        })
        free[level] = begin - 26 - labelW
      })
    }
    const first = part[0]
    if (row === 0 && first !== undefined)
      feeds.push({ streams: ownStreams(facts, first, joins), x: x0 - 26, y, joinX: null, joinY: y, row, tight: false })
    const figuresY = y + mainHalf + wall + 15
    const profileY = figuresY + 92
    rows.push({ x0, x1, y, figuresY, profileY, last: row === cut.length - 1 })
    top = profileY + profileHeight + 22
  })
  return { height: top, rows, segments, feeds }
}

interface Branch {
  readonly segments: readonly SegmentFacts[]
  readonly streams: readonly string[]
}
interface Join {
  /** Place in the row of the segment that is joined at its inlet. */
  readonly index: number
  readonly branches: readonly Branch[]
}

function joinsOf(facts: SkidFacts, body: readonly SegmentFacts[], part: readonly SegmentFacts[]): Join[] {
  return part.flatMap((s, index): Join[] => {
    const before = body[body.indexOf(s) - 1]
    const ends = facts.segments.filter((f) => !f.main && f.leadsTo === s.id)
    const branches: Branch[] = ends.map((end) => {
      const chain = [end]
      for (;;) {
        const up = facts.segments.find((f) => !f.main && f.leadsTo === chain[0]!.id)
        if (up === undefined || chain.includes(up)) break
        chain.unshift(up)
      }
      return { segments: chain, streams: chain[0]!.streams }
    })
    const carried = new Set([...(before?.streams ?? []), ...branches.flatMap((b) => b.streams)])
    const fresh = before === undefined ? [] : s.streams.filter((id) => !carried.has(id))
    const all = [...branches, ...fresh.map((id): Branch => ({ segments: [], streams: [id] }))]
    return all.length === 0 ? [] : [{ index, branches: all }]
  })
}

const ownStreams = (facts: SkidFacts, first: SegmentFacts, joins: readonly Join[]): string[] => {
  const joined = new Set(joins.filter((j) => j.index === 0).flatMap((j) => j.branches.flatMap((b) => b.streams)))
  return first.streams.filter((id) => !joined.has(id) && facts.streams.some((s) => s.id === id))
}

/** Places of one row: by share, none under nine per cent of it. */
function widths(part: readonly SegmentFacts[]): { x: number; w: number }[] {
  const total = x1 - x0 - gap * (part.length - 1)
  const known = part.every((s) => s.share !== null)
  const raw = part.map((s) => (known ? Math.max(leastShare, s.share!) : 1))
  // Long ones give way: the square root leaves the short ones room for their figures. Reactors, where it closes, get more.
  const soft = raw.map((share, i) => Math.sqrt(share) * (part[i]!.kind === 'reactor' ? 1.4 : 1))
  // Everyone gets the least width; what is left goes by share.
  const spare = total - leastW * part.length
  const sum = soft.reduce((a, b) => a + b, 0)
  let x = x0
  return soft.map((share) => {
    const w = leastW + (spare * share) / sum
    const at = { x, w }
    x += w + gap
    return at
  })
}
