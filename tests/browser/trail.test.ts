import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Trail } from '../../server/wire/index.ts'
import { chromiumPath, launch, open, violations } from '../helpers/browser.ts'
import { smallPng } from '../helpers/png.ts'
import { root, type ServerProcess, startServer } from '../helpers/server-process.ts'

const chromium = chromiumPath()
const pictures = join(root, 'dist/pictures')
const until = (page: Page, test: string) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout: 20_000, interval: 100, message: test }).toBe(true)
const data = 'document.querySelector("main").dataset'
const password = 'seven quiet otters swim upriver'

describe.runIf(chromium !== null)('the audit trail in a real browser, on a server with people', () => {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-trail-'))
  let browser: Browser
  let server: ServerProcess
  const post = async (path: string, body: unknown, cookie = ''): Promise<{ json: Record<string, unknown>; cookie: string }> => {
    const url = new URL(path, server.url)
    const headers = { 'content-type': 'application/json', origin: url.origin, cookie }
    const reply = await fetch(url, { method: 'POST', headers, body: JSON.stringify(body) })
    expect(reply.status, await reply.clone().text()).toBe(200)
    return { json: (await reply.json()) as Record<string, unknown>, cookie: (reply.headers.get('set-cookie') ?? '').split(';')[0]! }
  }
  const shoot = async (page: Page, name: string) =>
    writeFileSync(join(pictures, `${name}.png`), smallPng(await page.screenshot({ fullPage: true })))
  const tokenOf = (link: string): string => link.split('#/link/')[1]!

  beforeAll(async () => {
    mkdirSync(pictures, { recursive: true })
    ;[browser, server] = await Promise.all([
      launch(chromium!),
      startServer([
        ...['--skid', 'fixtures/skids/heron.yaml', '--data', join(dir, 'store'), '--keys', join(dir, 'keys')],
        ...['--port', '0', '--speed', '600'],
      ]),
    ])
  })
  afterAll(async () => {
    await browser?.close()
    await server?.stop('SIGTERM')
    rmSync(dir, { recursive: true, force: true })
  })

  // REC-03
  it('a reviewer sees who changed what from what to what and why, marks it as reviewed, and what comes later stands out', async () => {
    const first = /#\/link\/\S+/.exec(server.said())![0]
    const admin = await post('/api/links/use', { token: tokenOf(first), name: 'Odo Fenn', password })
    const person = async (name: string, role: string): Promise<string> => {
      const { json } = await post('/api/people', { name, role, reason: 'joins the night shift' }, admin.cookie)
      return (await post('/api/links/use', { token: tokenOf(json['path'] as string), name: null, password }, '')).cookie
    }
    const engineer = await person('Ruth Alder', 'engineer')
    const reviewer = await person('Ada Quill', 'reviewer')
    const act = (body: object) => post('/api/runs/1/acts', body, engineer)
    await act({ kind: 'comment', alarm: null, text: 'pump B sounds rough' })
    await act({ kind: 'limit', segment: 'R1', limit: 'dpHighBar', value: 5.5, reason: 'a gasket under suspicion' })
    await act({ kind: 'acknowledge', alarm: 9999 })

    const { page, faults } = await open(browser, server.url, { width: 1366, height: 768 })
    const [name, value] = reviewer.split('=') as [string, string]
    await page.context().addCookies([{ name, value, url: server.url }])
    await page.goto(`${server.url}#/trail/1`)
    await page.reload()
    await until(page, `${data}.page === 'trail' && ${data}.ready === 'true' && Number(${data}.rows) > 4`)
    const row = (what: string) => page.textContent(`tr[data-what="${what}"]`)
    expect(await row('limit')).toMatch(/Ruth Alder.*R1 dpHighBar.*6 → 5\.5.*a gasket under suspicion/)
    expect(await row('comment')).toContain('pump B sounds rough')
    expect(await page.textContent('tr[data-group="refused"]')).toContain('acknowledge: refused')
    expect(await page.evaluate(`document.querySelectorAll('tr.fresh').length === Number(${data}.rows)`)).toBe(true)
    expect(await violations(page)).toEqual([])
    await shoot(page, 'trail-day-1366x768')

    await page.fill('#remark', 'nothing to remark')
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('tr[data-group="review"]') !== null && document.querySelector('tr.fresh') === null`)
    expect(await page.textContent('[role=status]')).toBeDefined()
    await act({ kind: 'comment', alarm: null, text: 'and now it is quiet' })
    await page.check('#trail-new')
    await until(page, `${data}.rows === '1'`)
    expect(await page.textContent('tr.fresh')).toContain('and now it is quiet')
    // The skid goes on: an alarm may have come meanwhile, which is new and not listed here.
    expect(await page.textContent('main')).toMatch(/[1-9]\d* new since Ada Quill reviewed it/)

    await page.uncheck('#trail-new')
    await page.selectOption('#trail-of', 'site')
    await until(page, `document.querySelector('tr[data-what="person.add"]') !== null`)
    await page.setViewportSize({ width: 1920, height: 1080 })
    await page.click('#theme')
    await shoot(page, 'trail-night-1920x1080')
    expect(await violations(page)).toEqual([])
    expect(faults).toEqual([])
  })

  it('shows an engineer the same and no button to review', async () => {
    const reply = await fetch(new URL('/api/runs/1/trail', server.url))
    const trail = (await reply.json()) as Trail
    expect(trail.signing.fingerprint).toMatch(/^[0-9a-f]{32}$/)
    const { page, faults } = await open(browser, `${server.url}#/trail/1`, { width: 1366, height: 768, night: true })
    await until(page, `${data}.page === 'trail' && ${data}.ready === 'true'`)
    expect(await page.isVisible('#review')).toBe(false)
    expect(await page.textContent('main')).toContain('A person of the role reviewer')
    expect(await page.textContent('main')).toContain(trail.signing.fingerprint!)
    await shoot(page, 'trail-night-1366x768')
    expect(faults).toEqual([])
  })
})
