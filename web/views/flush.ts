import type { FlushPlan } from '../../server/core/report.ts'
import type { ActReply, ActSent, Course, FlushDetail, LiveState, ServerMessage } from '../../server/wire/index.ts'
import { getJson, postJson, said } from '../api.ts'
import type { Feed, Link } from '../feed.ts'
import { counts, nameOf, nextStep, runningStep, whatNow } from '../model/flush-now.ts'
import { duration, figure, fixed } from '../model/format.ts'
import { adviceInForce } from '../model/in-force.ts'
import type { RunData } from '../model/run-data.ts'
import { inPlantTime } from '../model/words.ts'
import { follow } from '../run-store.ts'
import { nowView } from './answers.ts'
import { el, fill, say } from './dom.ts'
import { channelView } from './flush-channel.ts'
import { flushHands } from './flush-hands.ts'
import { pointsView } from './flush-points.ts'
import { flushStory } from './flush-story.ts'
import { liveStrip } from './live-strip.ts'
import { planBody } from './plan.ts'
import { runClock } from './run-clock.ts'
import type { Shell, WatchView } from './watch.ts'

type FlushAct = Extract<ActSent, { readonly kind: 'flush-step' | 'flush-check' }>

/** The guided flush of a live run: a channel with gates, the hold points of the step that runs, and on the right what a person does next. */
export function flushView(data: RunData, feed: Feed, shell: Shell): WatchView {
  const facts = data.detail.skidFacts
  const run = data.detail.run
  const clock = runClock()
  let plan: FlushPlan | null = null
  let planOf = ''
  let spoken = ''
  /** A flush that is over stays on the page until another is planned. */
  let planning = false

  const answers = threeAnswers(['Step', 'Hold points met', 'Time'])
  const now = nowView()
  const hands = flushHands(
    (tMs) => data.clock.hms(tMs),
    (act) => send(act),
  )
  const channel = channelView((step) => void hands.gate(step))
  const points = pointsView()
  const story = flushStory(data.clock)
  const figures = el('dl', { class: 'figures' })
  const beforehand = el('section', { class: 'plan sheet', 'aria-label': 'The plan' })
  const begin = beginBox()
  const waiting = el('p', { class: 'hush', text: 'Waiting for the first state of the run.' })
  const course = el('div', { class: 'course' }, answers.node, channel.node, points.node, figures, story.node)
  const plant = el('section', { class: 'plant', 'aria-label': 'The flush' }, waiting, course, beforehand)
  const person = el('section', { class: 'person', 'aria-label': 'What to do' }, now.node, hands.node, begin.node)
  const node = el(
    'main',
    { id: 'main', class: 'halves flush', tabindex: -1 },
    el('h1', { class: 'vh', text: `Skid ${facts.skid}, flush` }),
    plant,
    person,
  )
  node.dataset['page'] = 'flush'
  const strip = liveStrip(data, shell, node, 'flush')
  for (const part of [course, beforehand, person]) part.hidden = true

  const followed = follow(data, feed, (what) => {
    if (what.state) clock.received()
    ask()
  })

  async function send(act: FlushAct): Promise<string> {
    if (!shell.needPerson()) return 'sign in first: the way is in the top strip'
    const before = followed.state()?.flush
    try {
      const { act: done } = await postJson<ActReply>(`/api/runs/${run}/acts`, act)
      // What came of it stands in the state, which may come a moment later.
      const detail = await getJson<FlushDetail>(`/api/runs/${run}/flush`)
      const refused = detail.course?.refusals.at(-1)
      if (refused !== undefined && refused.tMs === done.tMs && refused.step === act.step) {
        shell.announce(`${nameOf(act.step)}: refused. ${refused.reasons[0] ?? ''}`)
        return refused.asked.startsWith('check') ? `Not taken: ${refused.reasons.join('; ')}.` : ''
      }
      if (act.kind === 'flush-step' && act.state === 'started' && detail.course?.flush === before?.flush && act.step === 'F0')
        return 'The flush did not open: no plan can be computed for this segment.'
      planning = false
      shell.announce('kept in the record')
      return ''
    } catch (error) {
      return said(error)
    }
  }

  /** Before a flush: which segment, its plan, and the one action that opens it. */
  function beginBox() {
    const pick = el(
      'select',
      { id: 'flush-segment' },
      ...facts.segments.map((s) => el('option', { value: s.id, text: `${s.id}, ${s.title}` })),
    )
    const go = el('button', {
      type: 'button',
      class: 'solid',
      id: 'begin',
      text: `Record ${nameOf('F0')} as begun`,
      on: { click: () => void press() },
    })
    const answer = el('p', { class: 'answered', role: 'status', hidden: true })
    const again = el('button', {
      type: 'button',
      id: 'another',
      text: 'Plan another flush',
      on: {
        click: () => {
          planning = true
          show()
          pick.focus()
        },
      },
    })
    const box = el(
      'div',
      { class: 'begin' },
      el('div', { class: 'entry' }, el('label', { for: 'flush-segment', text: 'Segment' }), pick),
      el('div', { class: 'row' }, go),
      answer,
      el('p', {
        class: 'soft',
        text: 'Advised under the site procedure, with the approval it asks for. Clearbore moves nothing on the skid: people do the steps, and confirm each here. The guidance times, counts, judges the hold points by readings, and records.',
      }),
    )
    const all = el('div', {}, again, box)
    let chosen = false
    pick.addEventListener('change', () => {
      chosen = true
      ask()
    })
    async function press(): Promise<void> {
      const text = await send({ kind: 'flush-step', segment: pick.value, step: 'F0', state: 'started', reason: '' })
      answer.hidden = text === ''
      say(answer, text)
    }
    return {
      node: all,
      segment: () => pick.value,
      show(state: LiveState, open: boolean): void {
        all.hidden = state.flush?.state === 'running'
        box.hidden = !open
        again.hidden = open
        if (chosen || document.activeElement === pick) return
        const advised = adviceInForce(state).find((a) => a.advice.action === 'flush')?.advice.segments[0]
        const worst = [...state.segments].sort((a, b) => (b.ratio ?? 0) - (a.ratio ?? 0))[0]?.segment
        pick.value = advised ?? worst ?? pick.value
      },
    }
  }

  let planAsked = ''
  function fetchPlan(segment: string): void {
    if (planAsked === segment) return
    planAsked = segment
    getJson<FlushPlan>(`/api/runs/${run}/flush-plan?segment=${encodeURIComponent(segment)}`).then(
      (p) => {
        if (planAsked === segment) fill(beforehand, el('h2', { text: `Flush of ${segment}: what is planned` }), planBody(p))
      },
      (error: unknown) => fill(beforehand, el('p', { text: `No plan for ${segment}: ${said(error)}` })),
    )
  }
  /** The plan of the course that is followed: once a flush. */
  function fetchCourse(c: Course): void {
    const key = `${c.flush}`
    if (planOf === key) return
    planOf = key
    plan = null
    getJson<FlushDetail>(`/api/runs/${run}/flush`).then(
      (d) => {
        plan = d.plan
        ask()
      },
      () => {
        planOf = ''
      },
    )
  }

  let frame = 0
  const ask = (): void => {
    frame ||= requestAnimationFrame(() => {
      frame = 0
      show()
    })
  }

  function show(): void {
    const state = followed.state()
    if (state === null) return
    if (waiting.isConnected) {
      waiting.remove()
      person.hidden = false
    }
    const c = state.flush
    const open = c === null || (planning && c.state !== 'running')
    course.hidden = open
    beforehand.hidden = !open
    hands.node.hidden = open
    begin.show(state, open)
    if (open) {
      const advised = adviceInForce(state).find((a) => a.advice.action === 'flush')?.advice
      now.show({
        far: advised === undefined ? 'No flush' : 'Flush advised',
        unit: null,
        to: null,
        below:
          advised === undefined
            ? 'No flush is under way and none is advised now. The plan is on the left; F0 opens the guidance.'
            : `${inPlantTime(advised.reason, data.clock, state.clock.nowMs)}. The plan is on the left; F0 opens the guidance.`,
      })
      fetchPlan(begin.segment())
    } else {
      fetchCourse(c)
      showCourse(c, state)
    }
    node.dataset['ready'] = 'true'
    node.dataset['flush'] = c?.state ?? 'none'
    node.dataset['step'] = (c === null ? null : (runningStep(c) ?? nextStep(c)))?.step ?? ''
    node.dataset['stepState'] = c === null ? '' : (runningStep(c)?.state ?? 'open')
    node.dataset['nowMs'] = String(Math.round(state.clock.nowMs))
    strip.show(state, clock.now(state), clock.link())
  }

  function showCourse(c: Course, state: LiveState): void {
    const nowMs = clock.now(state)
    const at = runningStep(c) ?? nextStep(c)
    const s = at ?? c.steps.findLast((x) => x.startedMs !== null) ?? c.steps[0]!
    const n = counts(s)
    const rest = [
      n['not-yet'] > 0 ? `${n['not-yet']} not yet` : '',
      n.unknown > 0 ? `${n.unknown} not known` : '',
      n.failed > 0 ? `${n.failed} failed` : '',
      n.skipped > 0 ? `${n.skipped} skipped` : '',
    ]
    answers.show([
      {
        far: [c.state === 'running' ? nameOf(s.step) : c.state === 'complete' ? 'all accepted' : `aborted in ${s.step}`],
        below:
          c.state === 'running'
            ? `${s.title}${s.liquid === null ? '' : `; ${s.liquid}`}${s.flowMlMin === null || s.flowMlMin === 0 ? '' : `, ${figure(s.flowMlMin, 'mL/min', 0)} planned`}`
            : `flush of ${c.segments.join(', ')}, opened ${data.clock.hms(c.openedMs)}`,
      },
      {
        far: [String(n.met), 'of', String(s.points.length)],
        below: s.startedMs === null ? 'not begun' : rest.filter((t) => t !== '').join(', ') || 'all met',
      },
      {
        far: s.startedMs === null ? ['–'] : [duration((s.endedMs ?? nowMs) - s.startedMs)],
        below:
          s.startedMs === null
            ? s.minutes === null
              ? 'time not computed'
              : `plan ${fixed(s.minutes, 0)} min`
            : `in ${s.step}${s.minutes === null ? '' : `, plan ${fixed(s.minutes, 0)} min`}; ${duration((c.endedMs ?? nowMs) - c.openedMs)} in all`,
      },
    ])
    channel.show(c, nowMs)
    points.show(s, s.startedMs !== null)
    showFigures(c, state, s)
    story.show(c, plan, s.step)
    const what = whatNow(c)
    now.show({ far: what.far, unit: null, to: null, below: what.below })
    hands.show(c)
    const text = `${nameOf(s.step)}: ${what.far}`
    if (text !== spoken) {
      spoken = text
      shell.announce(text)
    }
  }

  function showFigures(c: Course, state: LiveState, s: Course['steps'][number]): void {
    const first = c.segments[0] ?? ''
    const seg = state.segments.find((x) => x.segment === first)
    const ratio = s.points.find((p) => p.unit === '× clean')
    const recovery = c.recovery.find((r) => r.segment === first)
    const pairs: [string, string][] = [
      [`Flow in ${first}`, figure(seg?.flowMlMin, 'mL/min', 0)],
      [
        `Passed in ${s.step}`,
        `${fixed(s.passedMl, 0)} mL${s.withoutFlowS > 0 ? `, ${duration(s.withoutFlowS * 1000)} not counted` : ''}`,
      ],
      [`ΔP over ${first}`, figure(seg?.dpNowBar, 'bar')],
      ['Ratio before', recovery?.before == null ? 'not known' : `${fixed(recovery.before, 2)} × clean`],
      [
        'Ratio now',
        ratio?.value == null
          ? ratio === undefined
            ? `not judged in ${s.step}`
            : 'not known'
          : `${fixed(Number(ratio.value), 2)} × clean`,
      ],
    ]
    const text = JSON.stringify(pairs)
    if (figures.dataset['key'] === text) return
    figures.dataset['key'] = text
    fill(figures, ...pairs.map(([name, value]) => el('div', {}, el('dt', { text: name }), el('dd', { text: value }))))
  }

  const tick = setInterval(() => {
    const state = followed.state()
    if (state === null) return
    strip.show(state, clock.now(state), clock.link())
    ask()
  }, 500)

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
      followed.stop()
      clearInterval(tick)
      cancelAnimationFrame(frame)
      shell.cut.show(null)
    },
  }
}

/** Three answers, large; a word between two figures is small. */
function threeAnswers(questions: readonly string[]) {
  const parts = questions.map((q) => {
    const far = el('p', { class: 'far' })
    const below = el('p', { class: 'd' })
    return { far, below, node: el('div', { class: 'answer' }, el('dt', { text: q }), el('dd', {}, far, below)), key: '' }
  })
  return {
    node: el('dl', { class: 'answers' }, ...parts.map((p) => p.node)),
    show(all: readonly { readonly far: readonly string[]; readonly below: string }[]): void {
      for (const [i, a] of all.entries()) {
        const p = parts[i]!
        const key = a.far.join(' ')
        if (key !== p.key) {
          p.key = key
          fill(p.far, ...a.far.map((t) => el(t === 'of' ? 'small' : 'span', { class: t === 'of' ? '' : 'val', text: t })))
          p.far.classList.toggle('long', key.length > 12)
        }
        say(p.below, a.below)
      }
    },
  }
}
