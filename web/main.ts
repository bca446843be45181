import type { RunDetail, RunRow, ServerMessage, Service } from '../server/wire/index.ts'
import { getJson, said } from './api.ts'
import { openEars } from './ears.ts'
import { type Link, openFeed } from './feed.ts'
import { callsOf } from './model/alarm-sound.ts'
import { zoneClock } from './model/clock.ts'
import { loadRun } from './run-store.ts'
import { openSession } from './session.ts'
import { publicPages, sitePages } from './site-pages.ts'
import { el, fill, say } from './views/dom.ts'
import { entriesView } from './views/entries.ts'
import { flushView } from './views/flush.ts'
import { footView } from './views/foot.ts'
import { handOverView } from './views/handover.ts'
import { refreshPalette } from './views/palette.ts'
import { performanceView } from './views/performance.ts'
import { type ReplayView, replayView } from './views/replay.ts'
import { runsView } from './views/runs.ts'
import { settingsView } from './views/settings.ts'
import { soundView } from './views/sound.ts'
import { cutView, stripView } from './views/strip.ts'
import { trailView } from './views/trail.ts'
import { trendBoard } from './views/trend-board.ts'
import { type Shell, type WatchView, watchView } from './views/watch.ts'

/** Kept in this browser only; a browser that refuses storage forgets at reload. */
const kept = {
  get(key: string): string | null {
    try {
      return localStorage.getItem(`clearbore.${key}`)
    } catch {
      return null
    }
  },
  set(key: string, value: string): void {
    try {
      localStorage.setItem(`clearbore.${key}`, value)
    } catch {
      // Private windows refuse; the setting lasts until the page closes.
    }
  },
}

const root = document.documentElement
const theme = (): 'day' | 'night' => (root.dataset['theme'] === 'night' ? 'night' : 'day')
function setTheme(t: 'day' | 'night'): void {
  root.dataset['theme'] = t
  refreshPalette()
}
setTheme((kept.get('theme') as 'day' | 'night' | null) ?? (matchMedia('(prefers-color-scheme: dark)').matches ? 'night' : 'day'))
window.addEventListener('resize', refreshPalette)

const says = document.getElementById('says')!
const app = document.getElementById('app')!
const strip = stripView({
  theme,
  toggleTheme() {
    setTheme(theme() === 'day' ? 'night' : 'day')
    kept.set('theme', theme())
    redraw()
  },
})
let who = ''
const session = openSession((now) => {
  strip.person(now)
  // A socket belongs to who opened it.
  if (who !== now.person?.name) feed.want(false)
  who = now.person?.name ?? ''
  feed.want(now.mayRead)
  root.dataset['reading'] = now.mayRead ? 'yes' : 'no'
  if (!now.mayRead && !publicPages.has(route().page)) void go()
})
const sound = soundView((text) => say(says, text))
const foot = footView(sound.node)
const cut = cutView()
const shell: Shell = {
  strip,
  cut,
  announce: (text) => say(says, text),
  person: session.person,
  role: () => session.now()?.person?.role ?? null,
  needPerson() {
    if (session.mayAct()) return true
    document.getElementById('person')?.focus()
    return false
  },
}
const place = el('div', { class: 'place' })
fill(app, strip.node, cut.node, place, foot.node)

let service: Service | null = null
let runs: readonly RunRow[] = []
let link: Link = { up: false, heardAt: null, retryInMs: null }
let watch: { run: number; view: WatchView } | null = null
let replay: ReplayView | null = null
let list: ReturnType<typeof runsView> | null = null
let desk: { stop(): void } | null = null
let turn = 0

const socketUrl = new URL('/ws', location.href)
socketUrl.protocol = location.protocol === 'https:' ? 'wss:' : 'ws:'
const feed = openFeed(socketUrl.href, {
  message(m: ServerMessage) {
    if (m.type === 'hello' || m.type === 'runs') {
      runs = m.runs
      tell()
      // A run begins, or the one watched has ended and the address does not insist on it: the page goes where the life is.
      const over = watch !== null && route().run === null && !runs.some((r) => r.run === watch?.run && r.state === 'live')
      if ((route().page === 'watch' || route().page === 'flush') && (watch === null || over)) void go()
    } else if (m.type === 'error') say(says, m.problem.message)
    watch?.view.take(m)
    ears.take(m)
  },
  open() {
    watch?.view.open()
    ears.open()
  },
  refused: () => void session.load().catch(() => undefined),
  link(l) {
    link = l
    watch?.view.link(l)
    if (watch === null) root.dataset['link'] = l.up ? 'up' : 'down'
    heard()
  },
})
const ears = openEars(feed, () => heard())

/** What stands on every live run, in the foot and to be heard. A server that has gone silent calls too: nobody watches then. */
function heard(): void {
  const all = ears.all()
  foot.show(
    all.flatMap(([run, alarms]) => (watch === null || watch.run === run ? alarms : [])),
    watch !== null,
  )
  const blind = !link.up && link.heardAt !== null && all.length > 0
  sound.calls([
    ...all.flatMap(([run, alarms]) => callsOf(run, alarms)),
    ...(blind ? [{ key: 'link', priority: 'medium' as const }] : []),
  ])
}

const pages = [
  'watch',
  'flush',
  'replay',
  'alarms',
  'handover',
  'trends',
  'entries',
  'settings',
  'trail',
  ...Object.keys(sitePages),
]
/** Pages about one run or its skid. */
const deskPages: Readonly<Record<string, (detail: RunDetail, shell: Shell) => { node: HTMLElement; title: string; stop(): void }>> =
  {
    alarms: (detail) => performanceView(detail),
    handover: handOverView,
    entries: entriesView,
    settings: settingsView,
    trail: trailView,
  }
/** Where the address leads: #/PAGE, #/PAGE/RUN, #/replay/RUN/MOMENT, or a page of the site. */
function route(): { page: string; run: number | null; atMs: number | null; rest: string } {
  const [, page, rest = '', at] = location.hash.split('/')
  const whole = (text: string | undefined) => (text !== undefined && /^\d+$/.test(text) ? Number(text) : null)
  return { page: pages.find((p) => p === page) ?? 'watch', run: whole(rest), atMs: whole(at), rest }
}

/** Where a person was before signing in. */
let cameFrom = '#/watch'
function back(): void {
  const there = session.now()?.mayRead === true ? cameFrom : '#/sign-in'
  if (location.hash === there) void go()
  else location.hash = there
}

function idle(page: string, skid: string): void {
  const modes: Readonly<Record<string, 'LIVE' | 'RUNS' | 'SITE'>> = { watch: 'LIVE', flush: 'LIVE', replay: 'RUNS' }
  strip.show({
    page,
    skid,
    mode: modes[page] ?? (page in sitePages ? 'SITE' : 'NOTES'),
    facts: [],
    comb: null,
    nowMs: null,
    clock: zoneClock('UTC'),
    zone: '',
  })
}

function leave(): void {
  watch?.view.stop()
  replay?.stop()
  desk?.stop()
  desk = null
  watch = null
  replay = null
  list = null
  tell()
}

/** Goes where the address says. The last call wins. */
async function go(): Promise<void> {
  const mine = ++turn
  const here = () => mine === turn
  const { page, run, atMs, rest } = route()
  leave()
  try {
    const { mayRead } = session.now() ?? (await session.load())
    if (!here()) return
    const isSite = page in sitePages
    if (page !== 'link' && page !== 'sign-in') cameFrom = location.hash === '' ? '#/watch' : location.hash
    if (!mayRead && !publicPages.has(page)) {
      location.hash = '#/sign-in'
      return
    }
    if (isSite) {
      idle(page, 'Clearbore')
      const { title, node } = sitePages[page]!(rest, session, back)
      fill(place, node)
      document.title = `${title} · Clearbore`
      return
    }
    service ??= await getJson<Service>('/api/service')
    if (!here()) return
    if (page === 'replay' && run === null) {
      idle('replay', 'Clearbore')
      list = runsView(service, shell)
      fill(place, list.node)
      list.show(runs.length > 0 ? runs : await getJson<RunRow[]>('/api/runs'))
      document.title = 'Runs · Clearbore'
      return
    }
    if (page === 'replay' && run !== null) {
      note(`Opening run ${run}.`)
      const data = await loadRun(run)
      if (!here()) return
      replay = replayView(data, shell, atMs)
      fill(place, replay.node)
      document.title = `Replay ${data.detail.skid} · Clearbore`
      return
    }
    if (runs.length === 0) runs = await getJson<RunRow[]>('/api/runs')
    if (!here()) return
    if (page in deskPages || page === 'trends') {
      const of = run ?? runs.find((r) => r.state === 'live')?.run ?? runs[0]?.run
      idle(page, 'Clearbore')
      if (of === undefined) return note('No run yet.')
      if (page === 'trends') {
        const data = await loadRun(of)
        if (!here()) return
        desk = trendBoard(data, shell, runs)
        fill(place, (desk as ReturnType<typeof trendBoard>).node)
        document.title = `Trends ${data.detail.skid} · Clearbore`
        return
      }
      const detail = await getJson<RunDetail>(`/api/runs/${of}`)
      if (!here()) return
      idle(page, detail.skid)
      const view = deskPages[page]!(detail, shell)
      desk = view
      fill(place, view.node)
      document.title = `${view.title} · Clearbore`
      return
    }
    const live = run === null ? runs.find((r) => r.state === 'live') : runs.find((r) => r.run === run)
    if (live === undefined) {
      idle('watch', 'Clearbore')
      note(
        run !== null
          ? `There is no run ${run}. Stored runs are on the replay page.`
          : runs.length === 0
            ? 'No run yet. As soon as a source sends its first reading, the skid appears here.'
            : 'No run is live now. Stored runs are on the replay page.',
      )
      document.title = 'Watch · Clearbore'
      return
    }
    if (live.state !== 'live') {
      location.hash = `#/replay/${live.run}`
      return
    }
    const data = await loadRun(live.run)
    if (!here()) return
    const view = page === 'flush' ? flushView(data, feed, shell) : watchView(data, feed, shell)
    watch = { run: live.run, view }
    tell()
    fill(place, view.node)
    view.link(link)
    view.open()
    document.title = `${page === 'flush' ? 'Flush' : 'Watch'} ${data.detail.skid} · Clearbore`
  } catch (error) {
    if (!here()) return
    idle(page, 'Clearbore')
    note(`${said(error)}. Trying again.`)
    setTimeout(() => {
      if (here()) void go()
    }, 2000)
  }
}

const note = (text: string): void =>
  fill(
    place,
    el(
      'main',
      { id: 'main', class: 'notice', tabindex: -1 },
      el('h1', { class: 'vh', text: 'Clearbore' }),
      el('p', { role: 'status', text }),
    ),
  )

/** After a change of theme: charts redraw by themselves, the strip says the other name. */
function redraw(): void {
  const button = document.getElementById('theme')
  if (button !== null) {
    say(button, theme() === 'day' ? 'Night' : 'Day')
    button.setAttribute('aria-label', `Change to ${theme() === 'day' ? 'night' : 'day'} colours`)
  }
}

/** The list of runs is new: the pages that show some of it. */
function tell(): void {
  list?.show(runs)
  ears.follow(
    runs.filter((r) => r.state === 'live').map((r) => r.run),
    watch?.run ?? null,
  )
  strip.skids(runs, watch?.run ?? null)
}

// Away from a live page, and with more than one skid, what stands elsewhere is still told.
setInterval(() => {
  if (!link.up || session.now()?.mayRead !== true || (watch !== null && runs.filter((r) => r.state === 'live').length < 2)) return
  getJson<RunRow[]>('/api/runs').then(
    (rows) => {
      runs = rows
      tell()
    },
    () => undefined,
  )
}, 5000)

window.addEventListener('hashchange', () => void go())
void go()
