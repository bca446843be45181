import type { AlarmRow, LiveState, Marks, SegmentFacts, SkidFacts } from '../../server/wire/index.ts'
import { timesOf } from '../model/bore.ts'
import { short } from '../model/format.ts'
import { valuesAt } from '../model/overlay.ts'
import { feedPair } from '../model/quotient.ts'
import { type RunData, rhythmMs } from '../model/run-data.ts'
import { type TrendKind, trendKinds, trendSpec, trendWords } from '../model/trend-spec.ts'
import { boresView } from './bores.ts'
import { el, fill, say } from './dom.ts'
import { trendChart } from './trend-chart.ts'

export interface TrendsShown {
  readonly state: LiveState
  readonly marks: Marks
  readonly alarms: readonly AlarmRow[]
  readonly fromMs: number
  readonly toMs: number
  readonly atMs: number
  /** Segment to show while nobody has chosen one. */
  readonly lead: string | null
}

/** One trend of one segment with tabs for both, and the bores of all segments below it on the same time axis. */
export function trendsView(data: RunData, tools: HTMLElement, withPlaces: boolean) {
  const facts = data.detail.skidFacts
  let kind: TrendKind = 'ratio'
  let chosen: string | null = null
  let shown: TrendsShown | null = null
  const title = el('h2')
  const kinds = el('div', { class: 'tabs', role: 'group', 'aria-label': 'What the trend shows' })
  const places = el('div', { class: 'tabs', role: 'group', 'aria-label': 'Segment of the trend' })
  const canvas = el('canvas', { role: 'img', tabindex: 0, id: 'trend' })
  const readout = el('p', { class: 'readout soft' })
  const frame = el('div', { class: 'chart' }, canvas, readout)
  const bores = boresView(facts, data)
  const below = el('div', { class: 'below' }, bores.node)
  const node = el(
    'section',
    { class: 'trend', 'aria-label': 'Trends' },
    el('div', { class: 'head' }, title, withPlaces ? places : null, kinds, tools),
    frame,
    below,
  )
  const chart = trendChart(canvas)
  const kindButtons = trendKinds.map((k) => {
    const b = el('button', { type: 'button', class: 'tab', text: trendWords[k].tab, on: { click: () => pick(k, chosen) } })
    return { k, b }
  })
  const placeButtons = facts.segments.map((s) => {
    const b = el('button', {
      type: 'button',
      class: 'tab',
      text: short(s.id, 10),
      title: `${s.id} ${s.title}`,
      on: { click: () => pick(kind, s.id) },
    })
    return { id: s.id, b }
  })
  fill(kinds, ...kindButtons.map((x) => x.b))
  fill(places, ...placeButtons.map((x) => x.b))

  function pick(k: TrendKind, segment: string | null): void {
    kind = k
    chosen = segment
    draw()
  }
  canvas.addEventListener('pointermove', (event) => {
    if (shown !== null) read(chart.timeAt(event.clientX))
  })
  canvas.addEventListener('pointerleave', () => say(readout, ''))

  function read(tMs: number): void {
    if (shown === null) return
    const spec = trendSpec(data, shown.state, shown.marks, { ...shown, kind, segment: segmentNow() })
    const parts = valuesAt(spec, tMs).map((v) => `${v.name} ${v.value === null ? 'not known' : v.value.toFixed(2)}`)
    say(
      readout,
      tMs > shown.atMs
        ? `${data.clock.hms(tMs)}: not yet`
        : `${data.clock.hms(tMs)} ${data.clock.offset(tMs)}: ${parts.join(', ')} · ${spec.yTitle}`,
    )
  }
  const segmentNow = (): string =>
    chosen ?? shown?.lead ?? facts.segments.find((s) => s.kind === 'reactor')?.id ?? facts.segments[0]!.id

  function draw(): void {
    if (shown === null) return
    const segment = segmentNow()
    const spec = trendSpec(data, shown.state, shown.marks, { ...shown, kind, segment })
    chart.show(spec)
    say(title, `${segment}, ${trendWords[kind].title}`)
    for (const { k, b } of kindButtons) {
      b.setAttribute('aria-pressed', String(k === kind))
      b.hidden =
        k !== kind &&
        !hasKind(
          facts,
          facts.segments.find((x) => x.id === segment),
          k,
        )
    }
    for (const { id, b } of placeButtons) b.setAttribute('aria-pressed', String(id === segment))
    const o = spec.overlay
    canvas.setAttribute(
      'aria-label',
      `${segment}, ${trendWords[kind].title}, ${data.clock.full(shown.fromMs)} to ${data.clock.full(shown.atMs)}. ${[o.onset?.label, o.fan === null ? null : `limit met ${o.fan.label}`, ...o.gaps.map((g) => g.label)].filter(Boolean).join(', ')}`,
    )
    canvas.dataset['segment'] = segment
    canvas.dataset['kind'] = kind
    const hot = shown.state.segments.find((s) => s.segment === segment)
    bores.show({
      fromMs: shown.fromMs,
      toMs: shown.toMs,
      atMs: shown.atMs,
      hot: segment,
      rhythmMs: rhythmMs(shown.state.clock.speed),
      times: timesOf(shown.state.segments),
      word: hot?.onset == null ? '' : `closing since ${data.clock.hm(hot.onset.atMs)}`,
    })
  }

  return {
    node,
    canvas,
    chart,
    pick,
    kind: () => kind,
    show(next: TrendsShown): void {
      shown = next
      draw()
    },
    destroy(): void {
      chart.destroy()
      bores.destroy()
    },
  }
}
export type TrendsView = ReturnType<typeof trendsView>

/** Whether a segment has anything to show of a kind. */
export function hasKind(facts: SkidFacts, spec: SegmentFacts | undefined, kind: TrendKind): boolean {
  if (kind === 'feed-ratio') return spec !== undefined && feedPair(facts, spec) !== null
  if (kind === 'temperature') return spec !== undefined && (spec.temperatures.length > 0 || spec.coolantTemperature !== null)
  return kind !== 'pressure' || spec?.pressureIn != null || spec?.dpTag != null
}
