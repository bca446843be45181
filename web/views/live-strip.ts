import type { LiveState } from '../../server/wire/index.ts'
import type { Link } from '../feed.ts'
import { nameOf, nextStep, runningStep } from '../model/flush-now.ts'
import { age, duration } from '../model/format.ts'
import type { RunData } from '../model/run-data.ts'
import type { Shell } from './watch.ts'

/** What the strip says of a live run, and the board that comes up when nothing is heard: of the server, or of the source of data. */
export function liveStrip(data: RunData, shell: Pick<Shell, 'strip' | 'cut'>, node: HTMLElement, page = 'watch') {
  const facts = data.detail.skidFacts
  let cutSince: { text: string; at: number } | null = null

  function board(state: LiveState, nowMs: number, link: Link): void {
    const wall = performance.now()
    const isCut = !link.up || state.data.cutOff || state.data.source.state === 'failed'
    if (isCut && cutSince === null) {
      const heard = link.up ? wall - (1000 * (state.data.ageS ?? 0)) / state.clock.speed : (link.heardAt ?? wall)
      cutSince = { text: data.clock.hms(link.up ? (state.data.lastRowMs ?? nowMs) : nowMs), at: heard }
    }
    if (!isCut) cutSince = null
    shell.cut.show(
      cutSince === null
        ? null
        : {
            since: cutSince.text,
            ms: wall - cutSince.at,
            link: !link.up,
            message: state.data.source.message,
            retryInMs: link.retryInMs,
          },
    )
    node.dataset['cut'] = isCut ? (link.up ? 'source' : 'link') : 'no'
  }

  /** How long production has lasted, as far as the page has looked back. */
  function lasted(state: LiveState, nowMs: number): string {
    if (!state.mode.production || data.window.toMs === 0) return ''
    const points = data.production.points()
    let i = points.length
    while (i > 0 && points[i - 1]!.y === 1) i--
    const begin = points[i]?.x
    if (begin === undefined) return ''
    const seenWhole = i > 0 || data.window.fromMs <= (data.detail.fromMs ?? data.window.fromMs)
    return `${seenWhole ? '' : 'over '}${duration(nowMs - begin)}`
  }

  /** Which flush is followed, and where it is. */
  function flushing(state: LiveState): string | null {
    const c = state.flush
    if (c === null || c.state !== 'running') return null
    const at = runningStep(c) ?? nextStep(c)
    return `of ${c.segments.join(', ')}${at === null ? '' : `, ${nameOf(at.step)}${at.state === 'running' ? '' : ' next'}`}`
  }

  return {
    show(state: LiveState, nowMs: number, link: Link): void {
      board(state, nowMs, link)
      const phase = state.mode.phase ?? (state.mode.production ? 'production' : 'no phase named')
      // By the wall: an age in a simulated clock's seconds would look sixty times older than it is.
      const ageMs = state.data.ageS === null ? null : (1000 * state.data.ageS + (nowMs - state.clock.nowMs)) / state.clock.speed
      const speed = Math.round(state.clock.speed)
      const demo = { bold: 'DEMO', text: speed === 1 ? 'simulated skid' : `time × ${speed}` }
      shell.strip.show({
        page,
        skid: facts.skid,
        mode: 'LIVE',
        facts: [
          ...(data.detail.kind === 'simulated' ? [demo] : []),
          {
            bold: `${phase[0]!.toUpperCase()}${phase.slice(1)}${state.mode.inferred ? ', inferred' : ''}`,
            text: flushing(state) ?? lasted(state, nowMs),
          },
        ],
        comb: {
          received: state.comb.received,
          text: ageMs === null || state.data.lagS === null ? null : [age(ageMs), age(1000 * state.data.lagS)],
        },
        nowMs,
        clock: data.clock,
        zone: facts.timeZone,
      })
    },
  }
}
