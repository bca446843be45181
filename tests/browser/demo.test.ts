import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { ActRow, AlarmRow } from '../../server/wire/index.ts'
import { chromiumPath, launch, open, violations } from '../helpers/browser.ts'
import { smallPng } from '../helpers/png.ts'
import { command, root, type ServerProcess, startServer } from '../helpers/server-process.ts'

const chromium = chromiumPath()
if (chromium === null) process.stderr.write('no Chromium here (set CHROMIUM to its path): the pages are not driven\n')
/** Pictures go here; with PICTURES=1 to fixtures/pictures, from where the README shows them. */
const pictures = join(root, process.env['PICTURES'] === '1' ? 'fixtures/pictures' : 'dist/pictures')
const speed = 600

/** Waits until an expression is true on the page. Asked from outside: the page's policy lets no text become code inside it. */
const until = (page: Page, test: string) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout: 20_000, interval: 100, message: test }).toBe(true)
const data = 'document.querySelector("main").dataset'

describe.runIf(chromium !== null)('the pages on the real server, in a real browser', () => {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-browser-'))
  let browser: Browser
  let server: ServerProcess
  /** Number of the run that a test brings. */
  let stored = 0
  const get = async <T>(path: string): Promise<T> => (await (await fetch(new URL(path, server.url))).json()) as T
  const shoot = async (page: Page, name: string) => writeFileSync(join(pictures, `${name}.png`), smallPng(await page.screenshot()))

  beforeAll(async () => {
    mkdirSync(pictures, { recursive: true })
    ;[browser, server] = await Promise.all([
      launch(chromium!),
      startServer(['--data', join(dir, 'store'), '--port', '0', '--speed', String(speed)]),
    ])
  })
  afterAll(async () => {
    await browser?.close()
    await server?.stop('SIGTERM')
    rmSync(dir, { recursive: true, force: true })
  })

  it('from start to a fouling alarm acknowledged by keyboard, with who did it in the record', async () => {
    const { page, faults } = await open(browser, server.url)
    await until(page, `${data}.ready === "true"`)
    expect(await page.textContent('.strip .mode')).toBe('LIVE')
    expect(await page.textContent('.strip .facts')).toContain(`DEMO time × ${speed}`)
    expect(await page.textContent('.strip .who')).toBe('demo operatorengineerDEMO')
    await until(page, `document.querySelector('.alarms li[data-kind="fouling"][data-state="UNACK"]') !== null`)
    await until(page, `document.querySelector('.answers').dataset.segment === 'R1'`)
    await until(page, `document.querySelector('#trend').dataset.onset !== ''`)
    expect(await violations(page)).toEqual([])
    const button = page.locator('.alarms li[data-kind="fouling"] button.ack')
    await button.focus()
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('.alarms li[data-kind="fouling"]').dataset.state === 'ACKED'`)
    await until(page, `document.querySelector('#says').textContent !== ''`)
    const acts = await get<ActRow[]>('/api/runs/1/acts')
    expect(acts.map((a) => [a.act.kind, a.act.person])).toContainEqual(['acknowledge', 'demo operator'])
    // A limit changed meanwhile is a step in the trend, with who changed it.
    const steps = Number(await page.getAttribute('#trend', 'data-limits'))
    const changed = await fetch(new URL('/api/runs/1/acts', server.url), {
      method: 'POST',
      headers: { 'content-type': 'application/json' },
      body: JSON.stringify({
        kind: 'limit',
        segment: 'R1',
        limit: 'dpHighBar',
        value: 5.5,
        reason: 'agreed at hand-over',
      }),
    })
    expect(changed.status).toBe(200)
    await until(page, `Number(document.querySelector('#trend').dataset.limits) > ${steps}`)
    // The answers stay legible from three metres: 72 px at the design size.
    expect(await page.evaluate(`parseFloat(getComputedStyle(document.querySelector('.answer .far')).fontSize)`)).toBe(72)
    expect(await page.textContent('.answer:nth-child(3) dt')).toBe('How long')
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('shows the computed flush with its hold points, and takes a comment on the alarm', async () => {
    const { page, faults } = await open(browser, server.url, { width: 1366, height: 768, night: true })
    await until(page, `document.querySelector('#open-plan') !== null`)
    await until(page, `Number(document.querySelector('#trend').dataset.points) > 30`)
    await shoot(page, 'watch-night-1366x768')
    await page.click('#open-plan')
    await until(page, `document.querySelectorAll('.plan [data-step]').length === 7`)
    expect(await page.evaluate(`document.activeElement.textContent`)).toMatch(/^Flush of /)
    expect(await page.textContent('[data-step="F3"]')).toMatch(/mL\/min.*mL.*min/)
    expect(await violations(page)).toEqual([])
    await page.keyboard.press('Escape')
    await until(page, `document.querySelector('#plan').hidden && document.activeElement.id === 'open-plan'`)
    await page.click('.alarms li[data-kind="fouling"] button.help')
    await page.fill('.alarms li[data-kind="fouling"] .comment input', 'water result of drum A asked for')
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('.comment input').placeholder === 'kept in the record'`)
    const acts = await get<ActRow[]>('/api/runs/1/acts')
    expect(acts.map((a) => (a.act.kind === 'comment' ? a.act.text : ''))).toContain('water result of drum A asked for')
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('a log brought through the page is replayed: onset with interval, alarm to trend, keys for zoom, a moment, no acknowledging', async () => {
    const log = join(dir, 'night.csv')
    await command([
      'simulate',
      '--skid',
      'fixtures/skids/heron.yaml',
      '--hours',
      '1.8',
      '--seed',
      '7',
      '--fouling',
      'R1:linear:0.6:2',
      '--out',
      log,
    ])
    const { page, faults } = await open(browser, `${server.url}#/replay`)
    await page.setInputFiles('#up-skid', join(root, 'fixtures/skids/heron.yaml'))
    await page.setInputFiles('#up-log', log)
    await page.fill('#up-title', 'night with a wet drum')
    await page.click('#upload button')
    await until(page, `document.querySelector('tr[data-title="night with a wet drum"][data-state="ended"]') !== null`)
    expect(await violations(page)).toEqual([])
    stored = Number(await page.getAttribute('tr[data-title="night with a wet drum"]', 'data-run'))
    await page.click(`tr[data-run="${stored}"] a`)
    await until(page, `${data}.page === 'replay' && ${data}.ready === 'true' && ${data}.onset !== '' && Number(${data}.alarms) > 0`)
    expect(await page.textContent('.strip .mode')).toBe('REPLAY')
    const [strip, body] = (await page.evaluate(
      `['.strip', 'body'].map((s) => getComputedStyle(document.querySelector(s)).backgroundColor)`,
    )) as [string, string]
    expect(strip).not.toBe(body)
    expect(await page.locator('button', { hasText: 'Acknowledge' }).count()).toBe(0)
    // What the page prints as "began" is the onset of the run's own report.
    const report = await get<{ segments: { segment: string; onset: { at: string } | null }[] }>(`/api/runs/${stored}/report`)
    const onset = report.segments.find((s) => s.segment === 'R1')!.onset!
    expect(Number(await page.evaluate(`${data}.onset`))).toBe(Date.parse(onset.at))
    await until(page, `document.querySelector('#trend').dataset.onset !== ''`)
    await shoot(page, 'replay-day-1920x1080')
    await page.click('.alarms li[data-kind="fouling"] button.help')
    await page.click('.alarms li[data-kind="fouling"] .ways button:text-is("Trend")')
    await until(page, `${data}.jumped !== undefined && document.activeElement.id === 'trend'`)
    expect(await page.evaluate(`document.querySelector('#trend').dataset.segment`)).toBe('R1')
    const span = `Number(document.querySelector('#trend').dataset.to) - Number(document.querySelector('#trend').dataset.from)`
    const before = (await page.evaluate(span)) as number
    await page.keyboard.press('+')
    await until(page, `${span} < ${0.6 * before}`)
    await page.keyboard.press('0')
    await until(page, `${span} >= ${before}`)
    // Before the alarm nothing of it is known.
    await page.locator('#moment').focus()
    await page.keyboard.press('Home')
    await until(
      page,
      `document.querySelector('.al').dataset.count === '0' && document.querySelector('#trend').dataset.onset === ''`,
    )
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('an exported alarm history says what the page says, row by row and rounded alike', async () => {
    const { page, faults } = await open(browser, `${server.url}#/replay/${stored}`, { downloads: true })
    await until(page, `${data}.ready === 'true' && Number(${data}.alarms) > 0`)
    const [download] = await Promise.all([page.waitForEvent('download'), page.click('text=Alarm history, CSV')])
    const path = join(dir, 'alarms.csv')
    await download.saveAs(path)
    const [head, ...lines] = readFileSync(path, 'utf8').trim().split(/\r?\n/).map(cells)
    const column = (line: string[], name: string) => line[head!.indexOf(name)]!
    const raised = lines
      .filter((l) => column(l, 'input') === 'act')
      .map(
        (l) => [column(l, 'alarm'), column(l, 'time_local').slice(11, 19), column(l, 'kind'), Number(column(l, 'value'))] as const,
      )
    const rows = (await page.evaluate(
      `[...document.querySelectorAll('.alarms > li')].map((li) => ({ id: li.dataset.alarm, kind: li.dataset.kind, when: li.querySelector('.tx .w').innerText.trim() }))`,
    )) as {
      id: string
      kind: string
      when: string
    }[]
    expect(rows.length).toBe(raised.length)
    for (const [id, time, kind, value] of raised) {
      const row = rows.find((r) => r.id === id)!
      expect(row.kind).toBe(kind)
      expect(row.when).toMatch(new RegExp(`^(FIRST)? *${time}`))
      if (kind === 'fouling') expect(row.when).toContain(value.toFixed(2))
    }
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('says within two scans that the server is gone, keeps what it had struck through, and comes back by itself without a gap', async () => {
    const { page, faults } = await open(browser, server.url, {
      allow: /ERR_CONNECTION_REFUSED|ERR_CONNECTION_RESET|WebSocket connection/,
    })
    await until(page, `${data}.ready === 'true' && ${data}.cut === 'no'`)
    await until(page, `Number(document.querySelector('#trend').dataset.points) > 10`)
    await shoot(page, 'watch-day-1920x1080')
    const killed = Date.now()
    await server.stop('SIGKILL')
    await until(page, `${data}.cut === 'link'`)
    expect(Date.now() - killed).toBeLessThan(2000)
    expect(await page.textContent('.cut')).toMatch(/NO DATA since \d\d:\d\d:\d\d.*Go to the local panel/)
    expect(await page.evaluate(`getComputedStyle(document.querySelector('.far .val')).textDecorationLine`)).toBe('line-through')
    const was = Number(await page.evaluate(`${data}.nowMs`))
    const alarms = await page.evaluate(`document.querySelectorAll('.alarms > li').length`)
    await page.setViewportSize({ width: 1366, height: 768 })
    await shoot(page, 'cut-off-day-1366x768')
    server = await startServer(['--data', join(dir, 'store'), '--port', String(server.port), '--speed', String(speed)])
    await until(page, `${data}.cut === 'no' && Number(${data}.nowMs) > ${was}`)
    expect(await page.evaluate(`document.querySelector('.cut').hidden`)).toBe(true)
    await until(page, `document.querySelectorAll('.alarms > li').length >= ${alarms}`)
    await until(page, `document.querySelector('#trend').dataset.gaps === '0'`)
    const rows = await get<AlarmRow[]>('/api/runs/1/alarms')
    expect(rows.find((a) => a.kind === 'fouling')?.acknowledgedBy).toBe('demo operator')
    expect(faults).toEqual([])
    await page.context().close()
  })

  it.each(['watch-day-1920x1080', 'watch-night-1366x768', 'replay-day-1920x1080', 'cut-off-day-1366x768'])(
    'left the picture %s, under 300 kB',
    (name) => {
      const file = join(pictures, `${name}.png`)
      expect(existsSync(file)).toBe(true)
      expect(readFileSync(file).length).toBeLessThan(300_000)
    },
  )
})

/** Cells of one CSV line by RFC 4180. */
function cells(line: string): string[] {
  return [...line.matchAll(/("(?:[^"]|"")*"|[^,]*)(?:,|$)/g)]
    .map((m) => m[1]!.replace(/^"|"$/g, '').replaceAll('""', '"'))
    .slice(0, -1)
}
