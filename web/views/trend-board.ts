import type { AlarmRow, LiveState, Marks, RunRow } from '../../server/wire/index.ts'
import { getJson, said } from '../api.ts'
import { asAt } from '../model/alarm-list.ts'
import { timesOf } from '../model/bore.ts'
import { short } from '../model/format.ts'
import { type Look, within } from '../model/look.ts'
import { valuesAt } from '../model/overlay.ts'
import { type RunData, rhythmMs } from '../model/run-data.ts'
import { type TrendKind, trendKinds, trendSpec, trendWords } from '../model/trend-spec.ts'
import { fetchWindow } from '../run-store.ts'
import { boresView } from './bores.ts'
import { el, fill, say } from './dom.ts'
import { overPicker } from './over-picker.ts'
import { type TrendChart, trendChart } from './trend-chart.ts'
import { trendHands } from './trend-hands.ts'
import { hasKind } from './trends.ts'
import type { Shell } from './watch.ts'

const leastMs = 600_000
/** A live run is asked again so often, ms. */
const everyMs = 3000
const spans = [
  { text: '10 min', ms: leastMs },
  { text: '1 h', ms: 3_600_000 },
  { text: '4 h', ms: 14_400_000 },
  { text: '12 h', ms: 43_200_000 },
  { text: 'whole run', ms: Infinity },
] as const

interface Panel {
  readonly kind: TrendKind
  readonly node: HTMLElement
  readonly canvas: HTMLCanvasElement
  readonly chart: TrendChart
  readonly values: HTMLElement
  spec: ReturnType<typeof trendSpec> | null
}

/** Every trend of one segment on one time axis: for the engineer at the desk. Points at one moment in all of them at once. */
export function trendBoard(data: RunData, shell: Shell, runs: readonly RunRow[]) {
  const { detail, clock } = data
  const facts = detail.skidFacts
  const isLive = detail.state === 'live'
  let segment = facts.segments.find((s) => s.kind === 'reactor')?.id ?? facts.segments[0]!.id
  let span: (typeof spans)[number] = spans[4]
  let chosen: Look | null = null
  let shown: Look = { fromMs: 0, toMs: leastMs }
  let cursorMs: number | null = null
  let state: LiveState | null = null
  let marks: Marks = data.marks
  let alarms: readonly AlarmRow[] = []
  let fetchTimer: ReturnType<typeof setTimeout> | undefined
  let asked: AbortController | null = null

  const says = el('p', { class: 'says', role: 'status' })
  const places = el('div', { class: 'tabs', role: 'group', 'aria-label': 'Segment of the trends' })
  const times = el('div', { class: 'tabs', role: 'group', 'aria-label': 'Time shown' })
  const moment = el('p', { class: 'board-moment', role: 'status' })
  const which = el(
    'select',
    {
      id: 'board-run',
      'aria-label': 'Run shown',
      on: {
        change: () => {
          location.hash = `#/trends/${which.value}`
        },
      },
    },
    ...runs
      .slice(0, 200)
      .map((r) => el('option', { value: r.run, selected: r.run === detail.run, text: `run ${r.run}, ${short(r.title, 30)}` })),
  )
  const over = overPicker(detail, runs, () => void compare())
  const placeButtons = facts.segments.map((s) => ({
    id: s.id,
    b: el('button', {
      type: 'button',
      class: 'tab',
      text: short(s.id, 10),
      title: `${s.id} ${s.title}`,
      on: { click: () => place(s.id) },
    }),
  }))
  const spanButtons = spans.map((s) => ({
    s,
    b: el('button', { type: 'button', class: 'tab', text: s.text, on: { click: () => toNow(s) } }),
  }))
  const back = el('button', {
    type: 'button',
    class: 'small',
    text: isLive ? 'Back to now' : 'Back to the whole',
    hidden: true,
    on: { click: () => toNow(isLive ? span : spans[4]) },
  })
  fill(places, ...placeButtons.map((x) => x.b))
  fill(times, back, ...spanButtons.map((x) => x.b))
  const panels = trendKinds.map((kind): Panel => {
    const values = el('span', { class: 'values' })
    const canvas = el('canvas', { role: 'img', tabindex: 0 })
    canvas.dataset['kind'] = kind
    const node = el(
      'section',
      { class: 'panel', 'aria-label': trendWords[kind].tab },
      el('h2', {}, trendWords[kind].title.replace(/ \[.*/, ''), ' ', values),
      el('div', { class: 'chart' }, canvas),
    )
    return { kind, node, canvas, chart: trendChart(canvas), values, spec: null }
  })
  const bores = boresView(facts, data)
  const boresPanel = el(
    'section',
    { class: 'panel', 'aria-label': 'Bores and production' },
    el('h2', { text: 'Bores' }),
    el('div', { class: 'below' }, bores.node),
  )
  const node = el(
    'main',
    { id: 'main', class: 'board', tabindex: -1 },
    el('h1', { class: 'vh', text: `Trends of run ${detail.run}, skid ${facts.skid}` }),
    el('div', { class: 'head' }, el('div', { class: 'row' }, which, ...over.choices), places, moment, times),
    over.stands,
    el('div', { class: 'panels' }, ...panels.map((p) => p.node), boresPanel),
    says,
  )
  node.dataset['page'] = 'trends'

  for (const p of panels) {
    trendHands(p.canvas, {
      now: () => shown,
      look,
      timeAt: p.chart.timeAt,
      about: () => cursorMs ?? (shown.fromMs + shown.toMs) / 2,
      keys: {
        '0': () => toNow(spans[4]),
        End: () => toNow(span),
        ',': () => point((cursorMs ?? shown.toMs) - (shown.toMs - shown.fromMs) / 100),
        '.': () => point((cursorMs ?? shown.fromMs) + (shown.toMs - shown.fromMs) / 100),
        Escape: () => point(null),
      },
    })
    p.canvas.addEventListener('pointermove', (event) => {
      if (event.buttons === 0) point(p.chart.timeAt(event.clientX))
    })
    p.canvas.addEventListener('pointerleave', () => point(null))
  }

  function point(tMs: number | null): void {
    cursorMs = tMs
    for (const p of panels) p.chart.point(tMs)
    read()
  }

  /** The values of every chart where the reader points. */
  function read(): void {
    const tMs = cursorMs
    const known = tMs !== null && tMs <= atMs()
    say(moment, tMs === null ? '' : `${clock.full(tMs)} ${clock.offset(tMs)}${known ? '' : ': not yet'}`)
    for (const p of panels) {
      if (p.spec === null) continue
      const at = tMs === null || !known ? [] : valuesAt(p.spec, tMs)
      say(p.values, at.map((v) => `${v.name} ${v.value === null ? 'not known' : v.value.toFixed(2)}`).join(', '))
    }
  }

  /** Now by the run, or its end: right of it nothing is known. */
  const atMs = (): number => (isLive ? (state?.clock.nowMs ?? detail.toMs ?? 0) : (detail.toMs ?? 0))

  function place(id: string): void {
    segment = id
    draw()
    void compare()
  }

  async function compare(): Promise<void> {
    say(says, await over.choose(segment))
    draw()
  }
  function toNow(s: (typeof spans)[number]): void {
    span = s
    chosen = null
    draw()
    void fetchNow()
  }
  function look(next: Look): void {
    const first = detail.fromMs ?? 0
    chosen = within(next, { fromMs: Math.min(first, atMs() - leastMs), toMs: atMs() + 0.2 * leastMs }, leastMs)
    draw()
    clearTimeout(fetchTimer)
    fetchTimer = setTimeout(() => void fetchNow(), 150)
  }
  function lookNow(): Look {
    if (chosen !== null) return chosen
    const first = detail.fromMs ?? atMs()
    const past = Math.max(leastMs, Math.min(span.ms, atMs() - first))
    return { fromMs: atMs() - past, toMs: atMs() + 0.1 * past }
  }

  async function fetchNow(): Promise<void> {
    asked?.abort()
    asked = new AbortController()
    const { signal } = asked
    try {
      const base = `/api/runs/${detail.run}`
      const [s, a, m] = await Promise.all([
        getJson<LiveState>(`${base}/state`, signal),
        getJson<AlarmRow[]>(`${base}/alarms`, signal),
        getJson<Marks>(`${base}/marks`, signal),
      ])
      state = s
      alarms = a
      marks = m
      const { fromMs, toMs } = lookNow()
      await fetchWindow(data, fromMs, Math.max(Math.min(toMs, atMs() + 1), fromMs + 1000), signal, false)
      say(says, '')
      draw()
      node.dataset['ready'] = 'true'
    } catch (error) {
      if (!(error instanceof DOMException)) say(says, said(error))
    }
  }

  function draw(): void {
    if (state === null) return
    shown = lookNow()
    const spec = facts.segments.find((s) => s.id === segment)
    for (const x of placeButtons) x.b.setAttribute('aria-pressed', String(x.id === segment))
    for (const x of spanButtons) x.b.setAttribute('aria-pressed', String(chosen === null && x.s === span))
    back.hidden = chosen === null
    const known = alarms.filter((a) => a.raisedMs <= atMs()).map((a) => asAt(a, atMs()))
    for (const p of panels) {
      p.node.hidden = !hasKind(facts, spec, p.kind)
      if (p.node.hidden) continue
      p.spec = trendSpec(data, state, marks, { kind: p.kind, segment, ...shown, atMs: atMs(), alarms: known, other: over.other() })
      p.chart.show(p.spec)
      p.canvas.setAttribute(
        'aria-label',
        `${segment}, ${trendWords[p.kind].title}, ${clock.full(shown.fromMs)} to ${clock.full(Math.min(shown.toMs, atMs()))}`,
      )
    }
    const hot = state.segments.find((s) => s.segment === segment)
    bores.show({
      ...shown,
      atMs: atMs(),
      hot: segment,
      rhythmMs: rhythmMs(state.clock.speed),
      times: timesOf(state.segments),
      word: hot?.onset == null ? '' : `closing since ${clock.hm(hot.onset.atMs)}`,
    })
    node.dataset['segment'] = segment
    read()
    shell.strip.show({
      page: 'trends',
      skid: facts.skid,
      mode: isLive ? 'LIVE' : 'REPLAY',
      facts: [{ bold: `run ${detail.run}`, text: isLive ? 'asked again every 3 s' : 'ended, nothing here is live' }],
      comb: null,
      nowMs: atMs(),
      clock,
      zone: facts.timeZone,
    })
  }

  void fetchNow()
  const again = setInterval(() => {
    if (isLive && chosen === null) void fetchNow()
  }, everyMs)
  return {
    node,
    stop(): void {
      clearInterval(again)
      clearTimeout(fetchTimer)
      asked?.abort()
      for (const p of panels) p.chart.destroy()
      bores.destroy()
    },
  }
}
export type TrendBoard = ReturnType<typeof trendBoard>
