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

/** What must be true before a step can be accepted, each with what is read now and how it stands. */
export function pointsView() {
  const title = el('h2', { id: 'points' })
  const body = el('tbody')
  const head = el(
    'tr',
    {},
    ...['Point', 'Needed', 'Now', 'State'].map((t, i) => el('th', { scope: 'col', class: i === 2 ? 'num' : '', text: t })),
  )
  const node = el(
    'section',
    { class: 'points', 'aria-labelledby': 'points' },
    el('div', { class: 'head' }, title),
    el('table', { class: 'hold' }, el('thead', {}, head), body),
  )
  let key = ''
  let cells: {
    readonly row: HTMLElement
    readonly value: HTMLElement
    readonly sign: HTMLElement
    readonly word: HTMLElement
    readonly why: HTMLElement
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
          return { row: el('tr'), value, sign, word, why, state: '' }
        })
        fill(
          body,
          ...s.points.map((p, i) => {
            const c = cells[i]!
            c.row.append(
              el('th', { scope: 'row', text: label(p) }),
              el('td', { text: p.needs }),
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
