import type { AlarmRow, LiveState } from '../../server/wire/index.ts'
import { getJson, said } from '../api.ts'
import { knownAt } from '../model/alarm-list.ts'
import { answersOf } from '../model/answers.ts'
import { duration, fixed } from '../model/format.ts'
import { type Look, panned, within, zoomed } from '../model/look.ts'
import type { RunData } from '../model/run-data.ts'
import { spanOf, trendOf } from '../model/trend-of.ts'
import { fetchWindow } from '../run-store.ts'
import { openBefore } from './alarm-before.ts'
import { alarmsView } from './alarms.ts'
import { el, say } from './dom.ts'
import { clamp } from './pen.ts'
import { trendHands } from './trend-hands.ts'
import { trendsView } from './trends.ts'
import type { Shell } from './watch.ts'

const leastSpanMs = 60_000

/** A stored run. A moment is shown; right of it nothing is known, and nothing here can be acknowledged. */
export function replayView(data: RunData, shell: Shell, openAtMs: number | null = null) {
  const { detail, clock } = data
  const facts = detail.skidFacts
  const first = detail.fromMs ?? 0
  const last = Math.max(detail.toMs ?? first, first + leastSpanMs)
  let window: Look = { fromMs: first, toMs: last }
  let atMs = last
  let state: LiveState | null = null
  let all: readonly AlarmRow[] = []
  let stateAsked: AbortController | null = null
  let windowAsked: AbortController | null = null
  let windowTimer: ReturnType<typeof setTimeout> | undefined

  const findings = el('dl', { class: 'answers findings' })
  const figures = ['Began', 'Noticed', 'How bad', 'How long'].map((q) => {
    const far = el('span', { class: 'mid' })
    const below = el('span', { class: 'd' })
    findings.append(el('div', { class: 'answer' }, el('dt', { text: q }), el('dd', {}, far, ' ', below)))
    return { far, below }
  })
  const button = (text: string, label: string, run: () => void) =>
    el('button', { type: 'button', class: 'small', text, 'aria-label': label, on: { click: run } })
  const tools = el(
    'div',
    { class: 'row zoom', role: 'group', 'aria-label': 'Part of the run shown' },
    button('◂', 'Earlier', () => pan(-0.5)),
    button('▸', 'Later', () => pan(0.5)),
    button('+', 'Zoom in', () => zoom(0.5)),
    button('−', 'Zoom out', () => zoom(2)),
    button('whole run', 'whole run', () => look(first, last)),
  )
  const trends = trendsView(data, tools, true)
  const slider = el('input', { type: 'range', id: 'moment', min: 0, max: 1000, step: 1, value: 1000, 'aria-label': 'Moment shown' })
  const sliderText = el('output', { for: 'moment', class: 'moment-text' })
  const moment = el(
    'div',
    { class: 'moment row' },
    el('label', { for: 'moment', text: 'Moment shown' }),
    button('−10 min', '−10 min: ten minutes earlier', () => seek(atMs - 600_000)),
    slider,
    button('+10 min', '+10 min: ten minutes later', () => seek(atMs + 600_000)),
    button('end', 'end: to the end of the run', () => seek(last)),
    sliderText,
  )
  const alarms = alarmsView(clock, { act: null, trend: (a) => jump(a), before: (a) => openBefore(detail.run, a, clock) })
  const links = el(
    'section',
    { class: 'exports' },
    el('h2', { text: 'Take it along' }),
    el(
      'p',
      { class: 'row' },
      ...[
        ['alarms.csv', 'Alarm history, CSV'],
        ['alarms.json', 'Alarm history, JSON'],
        ['samples.csv', 'Readings, CSV'],
        ['events.csv', 'Entries, CSV'],
        ['record.json', 'Record, JSON'],
      ].map(([file, text]) =>
        el('a', {
          class: 'button small',
          href: `/api/runs/${detail.run}/export/${file}`,
          download: `run-${detail.run}-${file}`,
          text: text!,
        }),
      ),
    ),
    el(
      'p',
      { class: 'row' },
      el('a', { href: `#/entries/${detail.run}`, text: 'Entries on this run' }),
      el('a', { href: `#/settings/${detail.run}`, text: 'Versions of its settings' }),
    ),
    el('p', { class: 'soft', text: `Times in the files are UTC; this page shows ${facts.timeZone}.` }),
  )
  const says = el('p', { class: 'says', role: 'status' })
  const node = el(
    'main',
    { id: 'main', class: 'halves replay', tabindex: -1 },
    el('h1', { class: 'vh', text: `Replay of run ${detail.run}, skid ${facts.skid}: nothing here is live` }),
    el('section', { class: 'plant', 'aria-label': 'The run' }, findings, moment, trends.node, says),
    el('section', { class: 'person', 'aria-label': 'What was known' }, alarms.node, links),
  )
  node.dataset['page'] = 'replay'

  slider.addEventListener('input', () => seek(first + ((last - first) * Number(slider.value)) / 1000))
  trendHands(trends.canvas, {
    now: () => window,
    look: (l) => look(l.fromMs, l.toMs),
    timeAt: trends.chart.timeAt,
    about: () => centre(),
    press: (tMs) => seek(tMs),
    keys: {
      '0': () => look(first, last),
      Home: () => seek(first),
      End: () => seek(last),
      ',': () => seek(atMs - (window.toMs - window.fromMs) / 100),
      '.': () => seek(atMs + (window.toMs - window.fromMs) / 100),
    },
  })

  const centre = (): number => (atMs >= window.fromMs && atMs <= window.toMs ? atMs : (window.fromMs + window.toMs) / 2)
  const pan = (share: number): void => {
    const l = panned(window, share)
    look(l.fromMs, l.toMs)
  }
  const zoom = (factor: number): void => {
    const l = zoomed(window, factor, centre())
    look(l.fromMs, l.toMs)
  }

  /** Shows a part of the run; never less than a minute, never beyond its ends. */
  function look(fromMs: number, toMs: number): void {
    window = within({ fromMs, toMs }, { fromMs: first, toMs: last }, leastSpanMs)
    draw()
    clearTimeout(windowTimer)
    windowTimer = setTimeout(() => void fetchNow(), 120)
  }

  async function fetchNow(): Promise<void> {
    windowAsked?.abort()
    windowAsked = new AbortController()
    try {
      await fetchWindow(data, window.fromMs, window.toMs + 1, windowAsked.signal)
      node.dataset['window'] = `${Math.round(window.fromMs)} ${Math.round(window.toMs)}`
      draw()
    } catch (error) {
      if (!(error instanceof DOMException)) say(says, said(error))
    }
  }

  function seek(tMs: number): void {
    atMs = clamp(tMs, first, last)
    slider.value = String(Math.round((1000 * (atMs - first)) / (last - first)))
    slider.setAttribute('aria-valuetext', clock.full(atMs))
    draw()
    stateAsked?.abort()
    stateAsked = new AbortController()
    const asked = Math.round(atMs)
    getJson<LiveState>(`/api/runs/${detail.run}/state?atMs=${asked}`, stateAsked.signal).then(
      (s) => {
        state = s
        say(says, '')
        node.dataset['shownMs'] = String(asked)
        draw()
      },
      (error: unknown) => {
        if (!(error instanceof DOMException)) say(says, said(error))
      },
    )
  }

  /** From an alarm to its trend: its segment, the hour around it, and the moment that it was raised. */
  function jump(a: AlarmRow): void {
    const place = trendOf(a, facts)
    if (place !== null) trends.pick(place.kind, place.segment)
    look(...spanOf(a))
    if (atMs < a.raisedMs) seek(a.raisedMs + 1000 * facts.stepSeconds)
    node.dataset['jumped'] = String(a.id)
    trends.canvas.focus()
  }

  function draw(): void {
    const known = knownAt(all, atMs, state)
    say(sliderText, `${clock.full(atMs)} ${clock.offset(atMs)}`)
    alarms.show(known, atMs, state?.flood ?? null, 'No alarm up to this moment.')
    strip()
    if (state === null) return
    const a = answersOf(facts, state, clock)
    const fouling =
      known.find((x) => x.kind === 'fouling' && x.segment !== null && x.segment === a.segment) ??
      known.find((x) => x.kind === 'fouling')
    const segment = fouling?.segment ?? a.segment
    const onset = state.segments.find((s) => s.segment === segment)?.onset ?? null
    const found = [
      onset === null
        ? ['no onset', 'nothing grew up to this moment']
        : [
            clock.hm(onset.atMs),
            `${segment}, between ${clock.hm(onset.lowMs)} and ${clock.hm(onset.highMs)} (${Math.round(100 * onset.level)} %)`,
          ],
      fouling === undefined
        ? ['not noticed', 'no fouling alarm up to this moment']
        : [
            clock.hm(fouling.raisedMs),
            `${onset === null ? '' : `${duration(fouling.raisedMs - onset.atMs)} after it began, `}at ${fixed(fouling.value, 2) ?? 'unknown'} × clean`,
          ],
      [`${a.howBad.far}${a.howBad.unit === null ? '' : ` ${a.howBad.unit}`}`, a.howBad.below],
      [a.howLong.to === null ? a.howLong.far : `${a.howLong.far} to ${a.howLong.to}`, a.howLong.below],
    ]
    found.forEach(([far, below], i) => {
      say(figures[i]!.far, far ?? '')
      say(figures[i]!.below, below ?? '')
    })
    trends.show({ state, marks: data.marks, alarms: known, ...window, atMs, lead: segment ?? a.segment })
    node.dataset['ready'] = 'true'
    node.dataset['onset'] = onset === null ? '' : String(onset.atMs)
  }

  function strip(): void {
    shell.strip.show({
      page: 'replay',
      skid: facts.skid,
      mode: 'REPLAY',
      facts: [
        { bold: `run ${detail.run}`, text: `of ${clock.day(first)}, nothing here is live` },
        { text: `${duration(last - first)}, ${detail.rows} rows` },
      ],
      comb: null,
      nowMs: atMs,
      clock,
      zone: facts.timeZone,
    })
  }

  strip()
  void fetchNow()
  getJson<AlarmRow[]>(`/api/runs/${detail.run}/alarms`).then(
    (rows) => {
      all = rows
      node.dataset['alarms'] = String(rows.length)
      draw()
    },
    (error: unknown) => say(says, said(error)),
  )
  if (openAtMs === null) seek(last)
  else {
    look(openAtMs - 3_600_000, openAtMs + 1_800_000)
    seek(openAtMs)
  }
  return {
    node,
    stop(): void {
      stateAsked?.abort()
      windowAsked?.abort()
      clearTimeout(windowTimer)
      alarms.stop()
      trends.destroy()
    },
  }
}
export type ReplayView = ReturnType<typeof replayView>
