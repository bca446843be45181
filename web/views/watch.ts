import type { ActReply, LiveState, RoleName, ServerMessage } from '../../server/wire/index.ts'
import { postJson } from '../api.ts'
import type { Feed, Link } from '../feed.ts'
import { refusalText } from '../model/alarm-refusal.ts'
import { answersOf } from '../model/answers.ts'
import { adviceInForce } from '../model/in-force.ts'
import { type Look, within } from '../model/look.ts'
import { longest, type RunData } from '../model/run-data.ts'
import { spanOf, trendOf } from '../model/trend-of.ts'
import { fetchWindow, follow } from '../run-store.ts'
import { adviceView } from './advice.ts'
import { openBefore } from './alarm-before.ts'
import { type ActBodyOf, alarmsView } from './alarms.ts'
import { answersView, nowView } from './answers.ts'
import { el, fill, say } from './dom.ts'
import { lineView } from './line.ts'
import { liveStrip } from './live-strip.ts'
import { planView } from './plan.ts'
import { runClock } from './run-clock.ts'
import type { cutView, StripState } from './strip.ts'
import { trendHands } from './trend-hands.ts'
import { trendsView } from './trends.ts'

export interface Shell {
  readonly strip: { show(s: StripState): void }
  readonly cut: ReturnType<typeof cutView>
  /** Said to assistive technology, politely. */
  announce(text: string): void
  person(): string
  /** What that person may; null: nobody is signed in. */
  role(): RoleName | null
  /** True when acts would be taken; else leads to signing in. */
  needPerson(): boolean
}

const leastMs = 600_000
const spans = [
  { id: '10m', text: '10 min', ms: leastMs },
  { id: '30m', text: '30 min', ms: 1_800_000 },
  { id: '2h', text: '2 h', ms: 7_200_000 },
  { id: '12h', text: '12 h', ms: 43_200_000 },
  { id: 'all', text: 'whole run', ms: Infinity },
] as const
const mostPoints = 4000

/** The live page of one run. */
export function watchView(data: RunData, feed: Feed, shell: Shell) {
  const facts = data.detail.skidFacts
  const run = data.detail.run
  let span: (typeof spans)[number] = spans[3]
  /** A part of the run that was chosen by hand; null while the page goes along with now. */
  let chosen: Look | null = null
  let chosenTimer: ReturnType<typeof setTimeout> | undefined
  const clock = runClock()
  let planOpen = false
  let chartAt = 0
  let chartDue = 0
  let fetching = false
  let firstMs = data.detail.fromMs
  let spoken = ''
  let shownLook: Look = { fromMs: 0, toMs: leastMs }

  const answers = answersView()
  const now = nowView()
  const tools = el('div', { class: 'tabs', role: 'group', 'aria-label': 'Time shown' })
  const trends = trendsView(data, tools, false)
  const line = lineView(facts, (segment) => trends.pick(trends.kind(), segment))
  const openPlan = (): void => {
    planOpen = !planOpen
    show()
    if (planOpen) plan.focus()
    else document.getElementById('open-plan')?.focus()
  }
  const plan = planView(openPlan)
  const advice = adviceView(data.clock, openPlan)
  const alarms = alarmsView(data.clock, {
    act: async (body: ActBodyOf) => {
      if (!shell.needPerson()) return 'sign in first: the way is in the top strip'
      const reply = await postJson<ActReply>(`/api/runs/${run}/acts`, body)
      const refused = reply.transitions.find((t) => t.outcome === 'refused')
      if (refused === undefined)
        shell.announce(body.kind === 'acknowledge' ? `alarm ${body.alarm} acknowledged by ${shell.person()}` : 'kept in the record')
      return refused === undefined ? '' : refusalText(refused.reason ?? 'not in this state')
    },
    trend: (a) => {
      const place = trendOf(a, facts)
      if (place !== null) trends.pick(place.kind, place.segment)
      planOpen = false
      const [fromMs, toMs] = spanOf(a)
      look({ fromMs, toMs })
      node.dataset['looked'] = String(a.id)
      show()
      trends.canvas.focus()
      trends.canvas.scrollIntoView({ block: 'nearest' })
    },
    before: (a) => openBefore(run, a, data.clock),
  })
  fill(
    alarms.more,
    el('a', { href: `#/alarms/${run}`, text: 'How the alarms do' }),
    el('a', { href: `#/handover/${run}`, text: 'Hand-over note' }),
  )
  const waiting = el('p', { class: 'hush', text: 'Waiting for the first state of the run.' })
  const plant = el(
    'section',
    { class: 'plant', 'aria-label': 'The plant' },
    waiting,
    answers.node,
    line.node,
    plan.node,
    trends.node,
  )
  const person = el('section', { class: 'person', 'aria-label': 'What to do' }, now.node, advice.node, alarms.node)
  const node = el(
    'main',
    { id: 'main', class: 'halves', tabindex: -1 },
    el('h1', { class: 'vh', text: `Skid ${facts.skid}, live` }),
    plant,
    person,
  )
  node.dataset['page'] = 'watch'
  const strip = liveStrip(data, shell, node)
  for (const part of [answers.node, line.node, trends.node, person]) part.hidden = true

  const spanButtons = spans.map((s) => ({
    s,
    b: el('button', { type: 'button', class: 'tab', text: s.text, on: { click: () => choose(s) } }),
  }))
  const back = el('button', {
    type: 'button',
    class: 'small',
    text: 'Back to now',
    hidden: true,
    on: {
      click: () => {
        choose(span)
        trends.canvas.focus()
      },
    },
  })
  fill(tools, back, ...spanButtons.map((x) => x.b))
  function choose(s: (typeof spans)[number]): void {
    span = s
    chosen = null
    pressed()
    void refetch()
  }
  function pressed(): void {
    back.hidden = chosen === null
    for (const x of spanButtons) x.b.setAttribute('aria-pressed', String(chosen === null && x.s === span))
    node.dataset['follows'] = String(chosen === null)
  }
  /** A part of the run by hand; the page stays there until it is sent back to now. */
  function look(next: Look): void {
    const state = followed.state()
    if (state === null) return
    const nowMs = clock.now(state)
    chosen = within(next, { fromMs: Math.min(firstMs ?? nowMs, nowMs - leastMs), toMs: nowMs + 0.4 * leastMs }, leastMs)
    pressed()
    charts(state, node.dataset['lead'] || null)
    clearTimeout(chosenTimer)
    chosenTimer = setTimeout(() => void refetch(), 150)
  }
  trendHands(trends.canvas, {
    now: () => shownLook,
    look,
    timeAt: trends.chart.timeAt,
    about: () => (shownLook.fromMs + shownLook.toMs) / 2,
    keys: {
      '0': () => choose(spans.at(-1)!),
      End: () => choose(span),
      Home: () => look({ fromMs: 0, toMs: shownLook.toMs - shownLook.fromMs }),
    },
  })

  const followed = follow(data, feed, (what) => {
    if (what.state) clock.received()
    chartDue = performance.now()
    if (data.window.toMs === 0 && !fetching) void refetch()
    if (longest(data) > mostPoints && !fetching) void refetch()
    ask()
  })

  const windowOf = (nowMs: number): [number, number] => {
    if (chosen !== null) return [chosen.fromMs, chosen.toMs]
    // A run opened before its first reading begins where the page first heard of one.
    firstMs ??= followed.state()?.comb.endMs ?? null
    const first = firstMs ?? nowMs
    const from = Math.max(first, nowMs - span.ms)
    const past = Math.max(nowMs - from, 600_000)
    return [nowMs - past, nowMs + 0.4 * past]
  }
  async function refetch(): Promise<void> {
    const state = followed.state()
    if (state === null) return
    fetching = true
    try {
      const nowMs = clock.now(state)
      const [from, to] = windowOf(nowMs)
      const last = state.data.lastRowMs === null ? nowMs : state.data.lastRowMs + 1
      await fetchWindow(data, from, Math.max(Math.min(to, last), from + 1000), undefined, to >= last)
      chartDue = performance.now()
      ask()
    } catch {
      // The trends come with the next try; the state and the live points are on the page already.
      data.window.toMs = 0
    } finally {
      fetching = false
    }
  }

  let frame = 0
  let isOver = false
  const ask = (): void => {
    if (isOver) return
    frame ||= requestAnimationFrame(() => {
      frame = 0
      show()
    })
  }

  function show(): void {
    const state = followed.state()
    if (state === null) return
    const first = waiting.isConnected
    if (first) {
      waiting.remove()
      for (const part of [answers.node, line.node, trends.node, person]) part.hidden = false
      choose(span)
    }
    const a = answersOf(facts, state, data.clock)
    answers.show(a)
    now.show(a.whatNow)
    line.show(state)
    advice.show(state, a.alarm, planOpen)
    const planned = adviceInForce(state)[0]?.advice.plan ?? null
    if (planned === null) planOpen = false
    plan.show(planned, planOpen)
    trends.node.hidden = planOpen
    alarms.show(state.alarms, state.clock.nowMs, state.flood, quietText(state))
    const text = `${a.where.far}, ${a.whatNow.far}, ${state.alarms.filter((x) => x.needsAck).length} not acknowledged`
    if (text !== spoken) {
      spoken = text
      shell.announce(text)
    }
    if (chartDue > chartAt && performance.now() - chartAt > 400) charts(state, a.segment)
    node.dataset['ready'] = 'true'
    node.dataset['nowMs'] = String(Math.round(state.clock.nowMs))
    node.dataset['lead'] = a.segment ?? ''
    strip.show(state, clock.now(state), clock.link())
  }

  function charts(state: LiveState, lead: string | null): void {
    chartAt = performance.now()
    const { lastRowMs } = state.data
    const fresh = lastRowMs !== null && state.clock.nowMs - lastRowMs < 10_000 * state.clock.speed
    const atMs = fresh ? lastRowMs : state.clock.nowMs
    const [fromMs, toMs] = windowOf(atMs)
    shownLook = { fromMs, toMs }
    trends.show({ state, marks: followed.marks(), alarms: state.alarms, fromMs, toMs, atMs, lead })
  }

  const quietText = (state: LiveState): string => {
    const judged = state.segments.filter((s) => s.baseline !== null).length
    return judged === 0
      ? 'No alarm stands. The clean baseline is not there yet: until then no verdict and no forecast.'
      : `No alarm stands; ${judged} of ${state.segments.length} segments have their clean baseline.`
  }

  const tick = setInterval(() => {
    const state = followed.state()
    if (state !== null) strip.show(state, clock.now(state), clock.link())
    if (state !== null && chartDue > chartAt) ask()
    if (data.window.toMs === 0 && state !== null && clock.link().up && !fetching) void refetch()
  }, 250)

  return {
    node,
    take: (m: ServerMessage) => followed.take(m),
    open: () => followed.subscribe(),
    link(l: Link): void {
      clock.linked(l)
      node.dataset['link'] = l.up ? 'up' : 'down'
      const state = followed.state()
      if (state !== null) strip.show(state, clock.now(state), clock.link())
      else say(waiting, l.up ? 'Waiting for the first state of the run.' : 'The server does not answer; trying again.')
    },
    stop(): void {
      isOver = true
      followed.stop()
      clearInterval(tick)
      clearTimeout(chosenTimer)
      cancelAnimationFrame(frame)
      alarms.stop()
      trends.destroy()
      shell.cut.show(null)
    },
  }
}
export type WatchView = ReturnType<typeof watchView>
