import type { RunRow, Session } from '../../server/wire/index.ts'
import type { ZoneClock } from '../model/clock.ts'
import { duration } from '../model/format.ts'
import { el, fill, say, svg } from './dom.ts'
import { moreView } from './more.ts'

export interface StripState {
  /** First word of the address. */
  readonly page: string
  readonly skid: string
  readonly mode: 'LIVE' | 'REPLAY' | 'RUNS' | 'NOTES' | 'SITE'
  /** Short facts in the middle: run state, speed. */
  readonly facts: readonly { readonly text: string; readonly bold?: string }[]
  readonly comb: { readonly received: readonly boolean[]; readonly text: readonly [string, string] | null } | null
  readonly nowMs: number | null
  readonly clock: ZoneClock
  readonly zone: string
}

export interface StripHooks {
  theme(): 'day' | 'night'
  toggleTheme(): void
}

/** The comb shows so many scans. */
const teeth = 30

/** The strip on top: which skid, live or not, what the run does, whether it is alive, and who is at the screen. */
export function stripView(hooks: StripHooks) {
  const skid = el('p', { class: 'skid' })
  const mode = el('p', { class: 'mode' })
  const links = [
    ['watch', el('a', { href: '#/watch', text: 'Watch' })],
    ['flush', el('a', { href: '#/flush', text: 'Flush' })],
    ['replay', el('a', { href: '#/replay', text: 'Replay' })],
    ['trends', el('a', { href: '#/trends', text: 'Trends' })],
    ['alarms', el('a', { href: '#/alarms', text: 'Alarms' })],
    ['handover', el('a', { href: '#/handover', text: 'Hand-over' })],
    ['entries', el('a', { href: '#/entries', text: 'Entries' })],
    ['settings', el('a', { href: '#/settings', text: 'Settings' })],
    ['trail', el('a', { href: '#/trail', text: 'Trail' })],
    ['people', el('a', { href: '#/people', text: 'People' })],
  ] as const
  const items = links.map(([page, link]) => el('li', { 'data-page': page, hidden: page === 'people' }, link))
  // Watching comes first; what is done now and then stands behind one word, so that the strip stays one line.
  const nowAndThen = new Set(['alarms', 'handover', 'entries', 'settings', 'trail', 'people'])
  const isMore = (i: HTMLElement) => nowAndThen.has(i.dataset['page']!)
  const more = moreView(items.filter(isMore))
  const skids = el('nav', { 'aria-label': 'Live skids', hidden: true })
  const facts = el('div', { class: 'facts' })
  const teethPath = svg('path')
  const comb = svg(
    'svg',
    { class: 'comb', viewBox: '0 0 120 20', role: 'img' },
    svg('path', { class: 'base', d: 'M0 19H120' }),
    teethPath,
  )
  const combText = el('span')
  const alive = el('div', { class: 'alive' }, comb, combText)
  const time = el('time')
  const zone = el('small')
  const clockText = el('p', { class: 'clock' }, time, ' ', zone)
  const who = whoView()
  const theme = el('button', { class: 'small', type: 'button', id: 'theme', on: { click: () => hooks.toggleTheme() } })
  const node = el(
    'header',
    { class: 'strip' },
    skid,
    mode,
    el('nav', { 'aria-label': 'Pages' }, el('ul', {}, ...items.filter((i) => !isMore(i)), el('li', {}, more.node))),
    skids,
    el('span', { class: 'grow' }),
    facts,
    alive,
    clockText,
    who.node,
    theme,
  )
  let factsKey = ''
  let skidsKey = ''

  return {
    node,
    /** Who is at the screen, and what that opens. */
    person(session: Session): void {
      items.find((i) => i.dataset['page'] === 'people')!.hidden = session.person?.role !== 'administrator'
      who.show(session)
    },
    /** Where more than one skid is live: a way to each, with what is not acknowledged there. */
    skids(runs: readonly RunRow[], here: number | null): void {
      const live = runs.filter((r) => r.state === 'live').sort((a, b) => a.run - b.run)
      const key = JSON.stringify([here, ...live.map((r) => [r.run, r.skid, r.alarms.unacknowledged])])
      if (key === skidsKey) return
      skidsKey = key
      skids.hidden = live.length < 2
      const item = (r: RunRow) => {
        const unack = r.alarms.unacknowledged === 0 ? '' : ` ${r.alarms.unacknowledged} unack`
        return el(
          'li',
          {},
          el('a', { href: `#/watch/${r.run}`, 'aria-current': r.run === here && 'page', text: `${r.skid}${unack}` }),
        )
      }
      fill(skids, el('ul', {}, ...live.map(item)))
    },
    show(s: StripState): void {
      say(skid, s.skid)
      say(mode, s.mode)
      mode.classList.toggle('replay', s.mode === 'REPLAY')
      node.classList.toggle('past', s.mode === 'REPLAY')
      node.dataset['mode'] = s.mode
      more.show(nowAndThen.has(s.page) ? (links.find(([page]) => page === s.page)?.[1].textContent ?? null) : null)
      for (const [page, link] of links)
        if (s.page === page) link.setAttribute('aria-current', 'page')
        else link.removeAttribute('aria-current')
      const key = JSON.stringify(s.facts)
      if (key !== factsKey) {
        factsKey = key
        fill(facts, ...s.facts.map((f) => el('p', {}, f.bold === undefined ? null : el('b', { text: `${f.bold} ` }), f.text)))
      }
      alive.hidden = s.comb === null
      if (s.comb !== null) {
        const n = s.comb.received.length
        teethPath.setAttribute(
          'd',
          s.comb.received.map((on, i) => (on ? `M${2 + (i + teeth - n) * 4} ${i === n - 1 ? 1 : 5}V19` : '')).join(''),
        )
        comb.setAttribute('aria-label', `last ${n} scans, ${s.comb.received.filter(Boolean).length} received`)
        if (s.comb.text === null) say(combText, 'no data yet')
        else fill(combText, 'data ', el('b', { text: s.comb.text[0] }), ' old, lag ', el('b', { text: s.comb.text[1] }))
      }
      clockText.hidden = s.nowMs === null
      say(time, s.nowMs === null ? '' : s.clock.hms(s.nowMs))
      if (s.nowMs !== null) time.setAttribute('datetime', new Date(s.nowMs).toISOString())
      say(zone, s.nowMs === null ? s.zone : s.clock.offset(s.nowMs))
      zone.title = s.zone
      say(theme, hooks.theme() === 'day' ? 'Night' : 'Day')
      theme.setAttribute('aria-label', `Change to ${hooks.theme() === 'day' ? 'night' : 'day'} colours`)
    },
  }
}

/** Who acts, with the role; leads to the account or to signing in. Always there. */
function whoView() {
  const node = el('p', { class: 'who' })
  const link = (href: string, text: string) => el('a', { href, id: 'person', text })
  return {
    node,
    show({ person, how, resting }: Session): void {
      if (person === null) fill(node, link('#/sign-in', 'Sign in to act'))
      else if (resting) fill(node, el('b', { text: person.name }), link('#/sign-in', 'Sign in again to act'))
      else
        fill(
          node,
          link('#/account', person.name),
          el('span', { class: 'role', text: person.role }),
          how === 'demo'
            ? el('span', {
                class: 'tag',
                title: 'Whoever is at this machine acts as this person, without signing in',
                text: 'DEMO',
              })
            : null,
        )
    },
  }
}

/** The board that covers nothing but cannot be missed: the values on this screen are old. */
export function cutView() {
  const title = el('h2')
  const text = el('p')
  const again = el('p', { class: 'soft' })
  const node = el('section', { class: 'cut', role: 'alert', hidden: true }, title, text, again)
  return {
    node,
    show(cut: { since: string; ms: number; link: boolean; message: string | null; retryInMs: number | null } | null): void {
      if (node.hidden !== (cut === null)) node.hidden = cut === null
      document.documentElement.dataset['cut'] = cut === null ? 'no' : 'yes'
      if (cut === null) return
      say(title, `NO DATA since ${cut.since}, ${duration(cut.ms)}`)
      say(
        text,
        cut.link
          ? 'This screen runs, the server does not answer. All values below are old. Go to the local panel.'
          : `The server runs, its source of data is silent${cut.message === null ? '' : `: ${cut.message}`}. All values below are old. Go to the local panel.`,
      )
      say(
        again,
        cut.link
          ? cut.retryInMs === null
            ? 'trying again'
            : `trying again in ${Math.ceil(cut.retryInMs / 1000)} s`
          : 'waiting for the source',
      )
    },
  }
}
