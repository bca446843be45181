import type { CourseStep, Point } from '../../server/wire/index.ts'
import { keyOf, pointStates, pointValue } from '../model/flush-now.ts'
import { el, fill, say, svg } from './dom.ts'

/** Disc with tick, quarter disc, hatched disc, crossed square: met, not yet, not known, failed or skipped. */
export function stateSign(state: Point['state']): SVGElement {
  const parts: Record<Point['state'], SVGElement[]> = {
    met: [svg('circle', { class: 'f', cx: 11, cy: 11, r: 9.5 }), svg('path', { class: 'p', d: 'M6.2 11.4l3.3 3.3 6.3-7.2' })],
    'not-yet': [svg('circle', { cx: 11, cy: 11, r: 9.5 }), svg('path', { class: 'f', d: 'M11 1.5v9.5h9.5A9.5 9.5 0 0 0 11 1.5z' })],
    unknown: [
      svg('circle', { cx: 11, cy: 11, r: 9.5, 'stroke-dasharray': '3.2 2.4' }),
      svg('path', { class: 'h', d: 'M4.5 13.5l9-9M4 19L18.5 4.5M8.5 18.5l9.5-9.5' }),
    ],
    failed: [svg('path', { d: 'M2 2H20V20H2Z' }), svg('path', { class: 'x', d: 'M6 6l10 10M16 6L6 16' })],
    skipped: [svg('path', { 'stroke-dasharray': '3.2 2.4', d: 'M2 2H20V20H2Z' }), svg('path', { class: 'x', d: 'M6 11h10' })],
  }
  return svg('svg', { class: 'hp', viewBox: '0 0 22 22', 'aria-hidden': 'true' }, ...parts[state])
}

/** Where a value began in this step, where it is, and the line it must come to; the strokes are on the side that does not do. */
function wayOf(p: Point): SVGElement {
  const node = svg('svg', { class: 'way', viewBox: '0 0 1000 100', preserveAspectRatio: 'none', 'aria-hidden': 'true' })
  if (p.state === 'unknown' && p.by === 'readings') {
    node.append(svg('path', { fill: 'url(#flush-not-known)', d: 'M0 15H1000V85H0Z' }))
    return node
  }
  if (p.limit === null || p.allowed === null || typeof p.value !== 'number') return node
  const from = p.from ?? p.value
  const values = [from, p.value, p.limit]
  const [low, high] = [Math.min(...values), Math.max(...values)]
  const span = high - low || 1
  const x = (v: number): number => Math.round(80 + (840 * (v - low)) / span)
  const limit = x(p.limit)
  const strokes: string[] = []
  const [first, last] = p.allowed === 'above' ? [0, limit - 14] : [limit + 24, 1000]
  for (let at = first; at <= last; at += 38) strokes.push(`M${at} 100l14 -30`)
  node.append(
    svg('path', { class: 's-thin', d: strokes.join('') }),
    svg('path', { class: 's-line', d: `M${limit} 5V100` }),
    svg('path', { class: 's-line', d: `M${x(from)} 45H${x(p.value)}` }),
    svg('path', { class: 's-dot', d: `M${x(p.value)} 45h.01` }),
  )
  return node
}

/** What must be true before a step can be accepted, each with what is read now and how it stands. */
export function pointsView() {
  const title = el('h2', { id: 'points' })
  const body = el('tbody')
  const head = el(
    'tr',
    {},
    ...['Point', 'Needed', 'From its start to now', 'Now', 'State'].map((t, i) =>
      el('th', { scope: 'col', class: i === 3 ? 'num' : i === 2 ? 'draw' : '', text: t }),
    ),
  )
  const node = el(
    'section',
    { class: 'points', 'aria-labelledby': 'points' },
    el('div', { class: 'head' }, title),
    el('table', { class: 'hold' }, el('thead', {}, head), body),
    svg(
      'svg',
      { class: 'vh', 'aria-hidden': 'true' },
      svg(
        'pattern',
        { id: 'flush-not-known', width: 9, height: 9, patternUnits: 'userSpaceOnUse', patternTransform: 'rotate(45)' },
        svg('rect', { class: 'k-hatch-bg', width: 9, height: 9 }),
        svg('rect', { class: 'k-hatch-line', width: 1.6, height: 9 }),
      ),
    ),
  )
  let key = ''
  let cells: {
    readonly row: HTMLElement
    readonly value: HTMLElement
    readonly sign: HTMLElement
    readonly word: HTMLElement
    readonly why: HTMLElement
    readonly way: HTMLElement
    drawn: string
    state: string
  }[] = []

  const words: Readonly<Record<string, string>> = {
    'reagent-stopped': 'feeds stopped',
    'outlet-diverted': 'outlet',
    'path-proven': 'path open',
    'reaction-heat-gone': 'reaction heat',
    'effluent-inactive': 'effluent test',
    'quench-isolated': 'quench',
    'all-warm': 'warm',
    'no-blocked-in': 'pressure',
    'no-heat-no-gas': 'heat',
    'ratio-flat': 'ratio',
    'effluent-blank': 'effluent',
    'karl-fischer-1': 'water, first',
    'karl-fischer-2': 'water, second',
    'ratio-clean': 'ratio',
    'no-ice': 'no ice',
    'in-control': 'in control',
  }
  /** Parts that say by themselves what they are. */
  const speaks = /^(flow|ΔP|ratio|alarms|gas|second sign|[A-Z]+-\d)/
  const label = (p: Point): string => {
    const word = words[p.criterion] ?? p.criterion
    return p.part === null ? word : speaks.test(p.part) ? p.part : `${p.part} ${word}`
  }

  return {
    node,
    show(s: CourseStep, begun: boolean): void {
      say(title, begun ? `To be true before ${s.step} can be accepted` : `What ${s.step} will ask for`)
      const k = `${s.step} ${s.points.map(keyOf).join(' ')}`
      if (k !== key) {
        key = k
        cells = s.points.map(() => {
          const [value, sign, word, why] = [el('td', { class: 'num' }), el('span'), el('b'), el('span')]
          return { row: el('tr'), value, sign, word, why, state: '', way: el('td', { class: 'draw' }), drawn: '' }
        })
        fill(
          body,
          ...s.points.map((p, i) => {
            const c = cells[i]!
            c.row.append(
              el('th', { scope: 'row', text: label(p) }),
              el('td', { text: p.needs }),
              c.way,
              c.value,
              el('td', { class: 'st' }, c.sign, ' ', c.word, c.why),
            )
            c.row.dataset['point'] = keyOf(p)
            return c.row
          }),
        )
      }
      s.points.forEach((p, i) => {
        const c = cells[i]!
        if (c.state !== p.state) {
          c.state = p.state
          c.row.dataset['state'] = p.state
          fill(c.sign, stateSign(p.state))
          say(c.word, pointStates[p.state])
        }
        say(c.value, pointValue(p))
        const drawn = `${p.state === 'unknown'} ${p.from} ${p.value}`
        if (c.drawn !== drawn) {
          c.drawn = drawn
          fill(c.way, wayOf(p))
        }
        c.value.classList.toggle('hatched', p.state === 'unknown' && p.by === 'readings')
        say(
          c.why,
          p.person === null
            ? p.state === 'met' || p.why === ''
              ? ''
              : `, ${p.why}`
            : `, ${p.person}${p.source === '' ? '' : `: ${p.source}`}`,
        )
      })
    },
  }
}
