import type { AlarmRow, LiveState, SegmentState, SkidFacts } from '../../server/wire/index.ts'
import { openPct, timesOf } from '../model/bore.ts'
import { figure, fixed, range, short } from '../model/format.ts'
import { standingOn } from '../model/in-force.ts'
import { feedHalf, type LineLayout, layoutLine, type PlacedSegment, wall } from '../model/line-layout.ts'
import { el, fill, place, say, svg } from './dom.ts'
import { drawProfile, drawSegment, drawStill } from './line-pen.ts'
import { lookOf, markView } from './mark.ts'

/** The line of the skid, cut open lengthways: bore and deposit of every segment, figures under each, temperatures along it. */
export function lineView(facts: SkidFacts, pick: (segment: string) => void) {
  const layout = layoutLine(facts)
  const still = svg('g')
  const moving = svg('g')
  const picture = svg(
    'svg',
    { viewBox: `0 0 1000 ${layout.height}`, preserveAspectRatio: 'none', 'aria-hidden': 'true' },
    still,
    moving,
  )
  const words = el('div', { class: 'words' })
  const node = el('figure', { class: 'pic line', role: 'group', 'aria-label': 'The line, cut open lengthways' }, picture, words)
  node.style.setProperty('--design-height', String(layout.height))
  still.append(
    svg(
      'defs',
      {},
      svg(
        'pattern',
        { id: 'not-known', width: 9, height: 9, patternUnits: 'userSpaceOnUse', patternTransform: 'rotate(45)' },
        svg('path', { class: 'k-hatch-bg', d: 'M0 0H9V9H0Z' }),
        svg('path', { class: 'k-hatch-line', d: 'M0 0H2V9H0Z' }),
      ),
    ),
  )
  drawStill(still, layout)
  const figures = new Map(layout.segments.map((s) => [s.id, figureView(s, layout, pick)]))
  const feeds = layout.feeds.map((f) => {
    const flow = el('p', { class: 'soft' })
    const streams = f.streams.map((id) => facts.streams.find((s) => s.id === id))
    const label = el(
      'div',
      {
        class: `fig feed${f.joinX === null && f.x < 100 ? ' first' : ''}`,
        title: streams.map((s) => `${s?.id} ${s?.title}`).join(', '),
      },
      el(
        'p',
        {},
        el('b', { text: f.streams.join(' + ') }),
        ` ${f.tight ? '' : short(streams[0]?.reagent ?? streams[0]?.title ?? '', 18)}`,
      ),
      flow,
    )
    place(label, { x: f.x / 10, y: (100 * f.y) / layout.height })
    words.append(label)
    return { flow, tags: streams.map((s) => s?.flowTag ?? '') }
  })
  words.append(...[...figures.values()].map((f) => f.node))
  const scaleNote = el('p', { class: 'lab scale soft' })
  place(scaleNote, { x: 0, y: (100 * (layout.rows[0]?.figuresY ?? 0)) / layout.height })
  words.append(scaleNote)
  const temps = el('div')
  words.append(temps)

  function show(state: LiveState): void {
    moving.replaceChildren()
    const times = timesOf(state.segments)
    say(scaleNote, `Deposit × ${times}; dots: ΔP limit`)
    for (const s of layout.segments) {
      const now = state.segments.find((x) => x.segment === s.id)
      drawSegment(moving, s, now, times, standingOn(state, s.id))
      figures.get(s.id)?.show(now, state)
    }
    for (const f of feeds) {
      const texts = f.tags.map((tag) => {
        const t = state.tags.find((x) => x.tag === tag)
        return t === undefined || t.quality === 'bad' || t.quality === 'none' ? 'flow not known' : figure(t.value, t.unit)
      })
      f.flow.textContent = texts.join(' + ')
    }
    fill(temps)
    for (const row of layout.rows) drawProfile(moving, temps, layout, row, facts, state)
    const closing = state.segments
      .filter((s) => (s.ratio ?? 1) >= 1.05)
      .map((s) => `${s.segment}: open to ${fixed(openPct(s.ratio), 0)} % of its clean bore`)
    node.setAttribute(
      'aria-label',
      `The line, cut open lengthways. ${closing.length === 0 ? 'No segment is closing.' : `${closing.join('; ')}.`}`,
    )
  }
  return { node, show }
}

function figureView(s: PlacedSegment, layout: LineLayout, pick: (segment: string) => void) {
  const mark = el('span')
  const big = el('b', { class: 'r' })
  const unit = el('span', { class: 'u', text: ' × clean' })
  const grows = el('p', { class: 'g' })
  const name = el(
    'button',
    { class: 'bare', type: 'button', title: `${s.id} ${s.title}: show its trend`, on: { click: () => pick(s.id) } },
    el('b', { text: s.id }),
  )
  const head = el('p', { class: 'n' }, name, el('span', { class: 'name', text: s.title }), mark)
  const ratio = el('p', { class: 'x' }, big, unit)
  const node = el('div', { class: `fig seg${s.main ? '' : ' over'}` }, head, ratio, grows)
  const row = layout.rows[s.row]!
  place(node, { x: s.x / 10, y: (100 * (s.main ? row.figuresY : s.y - feedHalf - wall - 4)) / layout.height, w: (s.w + 24) / 10 })
  let key = ''
  return {
    node,
    show(now: SegmentState | undefined, state: LiveState): void {
      const alarm = standingOn(state, s.id)
      const ratioText = fixed(now?.ratio, 2)
      big.textContent = ratioText ?? 'no ratio'
      unit.hidden = ratioText === null
      const rate = now?.growthPerHour ?? null
      unit.textContent = ` × clean${rate === null ? '' : `, ${rate < 0 ? '' : '+'}${fixed(rate, 2)} /h`}`
      node.classList.toggle('hot', alarm?.active === true && ratioText !== null && rate !== null)
      node.dataset['ratio'] = ratioText ?? ''
      grows.textContent = growth(now, state, alarm)
      grows.classList.toggle('soft', alarm === null)
      const k = alarm === null ? '' : `${alarm.priority} ${alarm.state}`
      if (k === key) return
      key = k
      fill(mark)
      if (alarm !== null) mark.append(markView(alarm.priority, lookOf(alarm.state)))
    },
  }
}

/** Time to the limit as a range, or why there is none. */
function growth(now: SegmentState | undefined, state: LiveState, alarm: AlarmRow | null): string {
  if (now === undefined) return 'no data'
  if (now.forecast !== null && now.forecast.highMs <= state.clock.nowMs) return 'limit met'
  if (now.forecast !== null) {
    const { low, high } = range(now.forecast.lowMs - state.clock.nowMs, now.forecast.highMs - state.clock.nowMs)
    return `limit in ${low} to ${high}`
  }
  if (now.ratio === null) {
    if (!state.mode.production) return now.baseline === null ? 'no baseline yet' : 'not in production'
    return now.baseline === null ? 'taking its baseline' : 'not known'
  }
  return alarm?.active === true && (alarm.kind === 'fouling' || alarm.kind === 'dp-limit') ? 'no forecast yet' : 'steady'
}
