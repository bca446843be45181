import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { ActRow, RunRow } from '../../server/wire/index.ts'
import { chromiumPath, launch, open, violations } from '../helpers/browser.ts'
import { smallPng } from '../helpers/png.ts'
import { root, type ServerProcess, startServer } from '../helpers/server-process.ts'

const chromium = chromiumPath()
const pictures = join(root, 'dist/pictures')
const until = (page: Page, test: string) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout: 20_000, interval: 100, message: test }).toBe(true)
const data = 'document.querySelector("main").dataset'
const words = { admin: 'seven quiet otters swim upriver', ruth: 'a kettle under the blue staircase' }

describe.runIf(chromium !== null)('people in a real browser, on a server that watches a skid', () => {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-people-'))
  let browser: Browser
  let server: ServerProcess
  const get = async <T>(path: string): Promise<T> => (await (await fetch(new URL(path, server.url))).json()) as T
  const shoot = async (page: Page, name: string) => writeFileSync(join(pictures, `${name}.png`), smallPng(await page.screenshot()))
  const options = { width: 1366, height: 768, allow: /status of (401|403|410|422)/ }
  const enter = async (page: Page, password: string) => {
    await page.fill('#password', password)
    await page.keyboard.press('Enter')
  }

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

  it('from the link on the console to an administrator, from his link to an operator, whose name stands under the act', async () => {
    // Whoever sits there may look, and not act.
    const looker = await open(browser, server.url, options)
    await until(looker.page, `${data}.ready === 'true'`)
    expect(await looker.page.textContent('.strip .who')).toBe('Sign in to act')

    const link = /http:\S+#\/link\/\S+/.exec(server.said())![0]
    const admin = await open(browser, link, options)
    await until(admin.page, `document.querySelector('#welcome') !== null`)
    expect(await admin.page.evaluate(`location.href`)).toBe(`${server.url}#/link`)
    expect(await violations(admin.page)).toEqual([])
    await shoot(admin.page, 'welcome-day-1366x768')
    await admin.page.fill('#name', 'Odo Fenn')
    await enter(admin.page, 'odo fenn password')
    await until(admin.page, `document.querySelector('#welcome .says').textContent.includes('Not done: the password')`)
    await enter(admin.page, words.admin)
    await until(admin.page, `${data}.ready === 'true'`)
    expect(await admin.page.textContent('.strip .who')).toBe('Odo Fennadministrator')

    await admin.page.click('.strip .more summary')
    await admin.page.click('.strip nav >> text=People')
    await until(admin.page, `document.querySelector('tr[data-person="Odo Fenn"]') !== null`)
    await admin.page.fill('#new-name', 'Ruth Alder')
    await admin.page.fill('#new-reason', 'joins the night shift')
    await admin.page.keyboard.press('Enter')
    await until(admin.page, `document.querySelector('tr[data-person="Ruth Alder"][data-role="operator"]') !== null`)
    expect(await violations(admin.page)).toEqual([])
    await shoot(admin.page, 'people-day-1366x768')
    const handed = await admin.page.inputValue('#link')

    const ruth = await open(browser, handed, { ...options, night: true })
    await until(ruth.page, `document.querySelector('#welcome h2')?.textContent === 'Password of Ruth Alder'`)
    await enter(ruth.page, words.ruth)
    await until(ruth.page, `${data}.ready === 'true'`)
    // A link works once.
    const again = await open(browser, handed, options)
    await until(again.page, `document.querySelector('main').textContent.includes('used already')`)
    await again.page.context().close()

    await until(ruth.page, `document.querySelector('.alarms li[data-state="UNACK"] .ack') !== null`)
    await ruth.page.locator('.alarms li[data-state="UNACK"] .ack').first().click()
    const { run } = (await get<RunRow[]>('/api/runs')).find((r) => r.state === 'live')!
    const acts = async () => (await get<ActRow[]>(`/api/runs/${run}/acts`)).map((a) => [a.act.kind, a.act.person])
    await expect.poll(acts, { timeout: 10_000 }).toContainEqual(['acknowledge', 'Ruth Alder'])
    await ruth.page.click('#person')
    await until(ruth.page, `document.querySelector('#sign-out') !== null`)
    expect(await violations(ruth.page)).toEqual([])
    await shoot(ruth.page, 'account-night-1366x768')
    await ruth.page.click('.strip nav >> text=Watch')
    await until(ruth.page, `${data}.ready === 'true'`)

    // Disabled, the person is signed out wherever that was, at once.
    await admin.page.selectOption('#who', { label: 'Ruth Alder, operator' })
    await admin.page.selectOption('#what', 'disable')
    await admin.page.fill('#reason', 'left the site')
    await admin.page.keyboard.press('Enter')
    await until(admin.page, `document.querySelector('tr[data-person="Ruth Alder"]').dataset.state === 'disabled'`)
    await until(ruth.page, `document.querySelector('.strip .who').textContent === 'Sign in to act'`)
    await ruth.page.click('#person')
    await ruth.page.fill('#name', 'ruth alder')
    await enter(ruth.page, words.ruth)
    await until(ruth.page, `document.querySelector('.says').textContent.includes('do not belong together')`)
    expect(await violations(ruth.page)).toEqual([])
    await shoot(ruth.page, 'sign-in-night-1366x768')
    expect([looker, admin, ruth].flatMap((x) => x.faults)).toEqual([])
    await Promise.all([looker, admin, ruth].map((x) => x.page.context().close()))
  }, 90_000)

  it('an administrator does not acknowledge; signed out, the page of people is closed', async () => {
    const { page, faults } = await open(browser, `${server.url}#/sign-in`, options)
    await page.fill('#name', 'ODO FENN')
    await enter(page, words.admin)
    await until(page, `${data}.ready === 'true'`)
    // What stood may be acknowledged by now; the night brings more.
    await page.locator('.alarms li .ack:visible').first().click({ timeout: 50_000 })
    await until(page, `document.body.textContent.includes('administrator, may not do this')`)
    await page.click('#person')
    await page.click('#sign-out button')
    await until(page, `document.querySelector('.strip .who').textContent === 'Sign in to act'`)
    expect(await page.evaluate(`document.querySelector('li[data-page="people"]').hidden`)).toBe(true)
    await page.goto(`${server.url}#/people`)
    await until(page, `document.querySelector('main').textContent.includes('needs a person who is signed in')`)
    expect(faults).toEqual([])
    await page.context().close()
  }, 90_000)

  it('behind a proxy nothing is shown before signing in, and the person lands where the address led', async () => {
    await server.stop('SIGTERM')
    const base = `http://127.0.0.1:${server.port}`
    server = await startServer([
      ...['--skid', 'fixtures/skids/heron.yaml', '--data', join(dir, 'store'), '--keys', join(dir, 'keys')],
      ...['--port', String(server.port), '--speed', '600', '--public-url', base, '--trust-proxy', '127.0.0.1'],
    ])
    const { page, faults } = await open(browser, `${base}/#/replay`, options)
    await until(page, `document.querySelector('#sign-in') !== null`)
    expect(await page.evaluate(`location.hash`)).toBe('#/sign-in')
    expect(await page.textContent('main')).not.toContain('without signing in')
    // Nor does the foot say that no alarm stands.
    expect(await page.evaluate(`getComputedStyle(document.querySelector('.counts')).display`)).toBe('none')
    await page.fill('#name', 'Odo Fenn')
    await enter(page, words.admin)
    await until(page, `document.querySelector('main')?.dataset.page === 'runs' && location.hash === '#/replay'`)
    await page.click('.strip nav >> text=Watch')
    await until(page, `${data}.ready === 'true'`)
    await page.click('#person')
    await page.click('#sign-out button')
    await until(page, `location.hash === '#/sign-in' && document.querySelector('#sign-in') !== null`)
    expect(faults).toEqual([])
    await page.context().close()
  }, 60_000)
})
