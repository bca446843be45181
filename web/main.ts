import type { RunRow, ServerMessage, Service } from '../server/wire/index.ts'
import { getJson, said } from './api.ts'
import { type Link, openFeed } from './feed.ts'
import { zoneClock } from './model/clock.ts'
import { loadRun } from './run-store.ts'
import { el, fill, say } from './views/dom.ts'
import { footView } from './views/foot.ts'
import { refreshPalette } from './views/palette.ts'
import { type ReplayView, replayView } from './views/replay.ts'
import { runsView } from './views/runs.ts'
import { cutView, stripView } from './views/strip.ts'
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

let person = kept.get('person') ?? ''
const says = document.getElementById('says')!
const app = document.getElementById('app')!
const strip = stripView({
  person: () => person,
  setPerson(name) {
    person = name
    kept.set('person', name)
  },
  theme,
  toggleTheme() {
    setTheme(theme() === 'day' ? 'night' : 'day')
    kept.set('theme', theme())
    redraw()
  },
})
const foot = footView()
const cut = cutView()
const shell: Shell = {
  strip,
  foot,
  cut,
  announce: (text) => say(says, text),
  person: () => person,
  needPerson() {
    if (person !== '') return true
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
      if (route().page === 'watch' && (watch === null || over)) void go()
    } else if (m.type === 'error') say(says, m.problem.message)
    watch?.view.take(m)
  },
  open: () => watch?.view.open(),
  link(l) {
    link = l
    watch?.view.link(l)
    if (watch === null) root.dataset['link'] = l.up ? 'up' : 'down'
  },
})

/** Where the address leads: #/watch, #/watch/RUN, #/replay, #/replay/RUN. */
function route(): { page: 'watch' | 'replay'; run: number | null } {
  const [, page, run] = location.hash.split('/')
  const n = Number(run)
  return { page: page === 'replay' ? 'replay' : 'watch', run: run !== undefined && run !== '' && Number.isInteger(n) ? n : null }
}

function idle(page: 'watch' | 'replay', skid: string): void {
  strip.show({
    page,
    skid,
    mode: page === 'watch' ? 'LIVE' : 'RUNS',
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
  watch = null
  replay = null
  list = null
  tell()
}

/** Goes where the address says. The last call wins. */
async function go(): Promise<void> {
  const mine = ++turn
  const here = () => mine === turn
  const { page, run } = route()
  leave()
  try {
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
      replay = replayView(data, shell)
      fill(place, replay.node)
      document.title = `Replay ${data.detail.skid} · Clearbore`
      return
    }
    if (runs.length === 0) runs = await getJson<RunRow[]>('/api/runs')
    if (!here()) return
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
    const view = watchView(data, feed, shell)
    watch = { run: live.run, view }
    tell()
    fill(place, view.node)
    view.link(link)
    view.open()
    document.title = `Watch ${data.detail.skid} · Clearbore`
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
  if (watch === null) foot.live(runs)
  strip.skids(runs, watch?.run ?? null)
}

// Away from a live page, and with more than one skid, what stands elsewhere is still told.
setInterval(() => {
  if (!link.up || (watch !== null && runs.filter((r) => r.state === 'live').length < 2)) return
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
