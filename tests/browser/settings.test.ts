import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { ActRow, RunRow, SettingsPage } from '../../server/wire/index.ts'
import { chromiumPath, launch, open, violations } from '../helpers/browser.ts'
import { smallPng } from '../helpers/png.ts'
import { root, type ServerProcess, startServer } from '../helpers/server-process.ts'

const chromium = chromiumPath()
const pictures = join(root, 'dist/pictures')
const until = (page: Page, test: string) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout: 20_000, interval: 100, message: test }).toBe(true)
const data = 'document.querySelector("main").dataset'

describe.runIf(chromium !== null)('settings and entries in a real browser, on the demo', () => {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-settings-'))
  let browser: Browser
  let server: ServerProcess
  const get = async <T>(path: string): Promise<T> => (await (await fetch(new URL(path, server.url))).json()) as T
  const shoot = async (page: Page, name: string) =>
    writeFileSync(join(pictures, `${name}.png`), smallPng(await page.screenshot({ fullPage: true })))

  beforeAll(async () => {
    mkdirSync(pictures, { recursive: true })
    ;[browser, server] = await Promise.all([
      launch(chromium!),
      startServer(['--data', join(dir, 'store'), '--keys', join(dir, 'keys'), '--port', '0', '--speed', '60']),
    ])
  })
  afterAll(async () => {
    await browser?.close()
    await server?.stop('SIGTERM')
    rmSync(dir, { recursive: true, force: true })
  })

  // REC-06 USR-05 USR-06
  it('a limit is changed by keyboard with its old value in sight and a reason, becomes version 2, and is compared with version 1', async () => {
    const { page, faults } = await open(browser, `${server.url}#/settings`, { width: 1366, height: 768, allow: /status of 400/ })
    await until(page, `${data}.page === 'settings' && ${data}.version === '1'`)
    await page.selectOption('#group', 'Limits of R1')
    await page.selectOption('#setting', { label: 'pressure drop, high' })
    expect(await page.textContent('#old')).toBe('6 bar')
    await page.fill('#new-value', '5,5')
    await page.fill('#change-reason', 'so')
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('#change-setting .says').textContent.includes('at least 5 characters')`)
    await page.fill('#change-reason', 'a gasket under suspicion')
    await page.keyboard.press('Enter')
    await until(page, `${data}.version === '2'`)
    expect(await page.textContent('#change-setting .says')).toBe('Done: R1: pressure drop, high 6 bar → 5.5 bar.')
    expect(await page.textContent('tr[data-version="2"] li')).toBe('R1: pressure drop, high: 6 bar → 5.5 bar')
    expect(await page.textContent('tr[data-version="2"]')).toContain('demo operator')
    await page.click('form[aria-label="Compare two versions"] button')
    await until(page, `document.querySelector('[data-changes]')?.dataset.changes === '1'`)
    expect(await violations(page)).toEqual([])
    await shoot(page, 'settings-day-1366x768')

    // A logic in two parts goes in as one version; the page of a big screen at night holds all of it.
    await page.fill('#logic', 'pressure-in-flush')
    await page.fill('#logic-alarms', 'dp-limit:R1')
    await page.check('#phase-flush')
    await page.fill('#logic-reason', 'flush liquid is thicker')
    await page.keyboard.press('Enter')
    await until(page, `${data}.version === '3'`)
    // One planned for the next day is taken back: another version at the same moment undoes it.
    await page.selectOption('#group', 'Promise')
    await page.fill('#new-value', '60')
    await page.fill('#effective', '2031-05-06 10:00')
    await page.fill('#change-reason', 'after the audit')
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('tr[data-version="4"] button') !== null`)
    await page.click('tr[data-version="4"] button')
    await page.fill('#back-reason', 'audit is put off')
    expect(await violations(page)).toEqual([])
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('tr[data-version="5"]') !== null && document.querySelector('dialog') === null`)
    const now = await get<SettingsPage>('/api/skids/heron/settings')
    expect(
      now.versions
        .slice(3)
        .map((v) => [v.planned, v.effectiveMs === now.versions[3]!.effectiveMs, v.changes.map((c) => [c.old, c.new])]),
    ).toEqual([
      [true, true, [[30, 60]]],
      [true, true, [[60, 30]]],
    ])
    expect(now.versions.slice(0, 3).map((v) => [v.version, v.changes.map((c) => c.new)])).toEqual([
      [1, []],
      [2, [5.5]],
      [3, [['dp-limit:R1'], ['flush']]],
    ])
    expect(faults).toEqual([])
    await page.context().close()
    const night = await open(browser, `${server.url}#/settings`, { width: 1920, height: 1080, night: true })
    await until(night.page, `${data}.version === '3'`)
    expect(await violations(night.page)).toEqual([])
    await shoot(night.page, 'settings-night-1920x1080')

    // The limit stands on the trend as it was: the step is drawn.
    await night.page.goto(`${server.url}#/watch`)
    await until(night.page, `${data}.ready === 'true'`)
    await night.page.click('.trend .tabs >> text=ΔP')
    await until(
      night.page,
      `(({ segment, kind, limits }) => segment === 'R1' && kind === 'dp' && limits === '3')(document.querySelector('#trend').dataset)`,
    )
    await shoot(night.page, 'limit-step-night-1920x1080')
    await night.page.context().close()
  })

  it('a Karl Fischer result with unit, feed and time of the sample stands in the list and becomes the water of its feed', async () => {
    const { page, faults } = await open(browser, `${server.url}#/entries`, { width: 1366, height: 768, allow: /status of 400/ })
    await until(page, `${data}.page === 'entries' && ${data}.ready === 'true'`)
    await page.selectOption('#of', 'A')
    await page.fill('#note', 'drum 7, lot 31-0412')
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('#enter .says').textContent.includes('Karl Fischer needs a value')`)
    await page.fill('#value', '0,021')
    await page.selectOption('#unit', '%')
    await page.locator('#note').press('Enter')
    await until(page, `${data}.entries === '1'`)
    expect(await page.textContent('tbody td')).toBe('Karl Fischer of A 0.021 %: drum 7, lot 31-0412')
    await page.selectOption('#event', 'comment')
    await page.fill('#note', 'smell at the box')
    await page.keyboard.press('Enter')
    await until(page, `${data}.entries === '2'`)
    expect(await violations(page)).toEqual([])
    await shoot(page, 'entries-day-1366x768')
    // All pages of the strip fit on its one line of a small screen, also where the strip says most.
    await page.goto(`${server.url}#/watch`)
    await until(page, `${data}.ready === 'true'`)
    expect(await page.evaluate(`document.querySelector('.strip').offsetHeight`)).toBeLessThan(64)
    await page.focus('.strip .more summary')
    await page.keyboard.press('Enter')
    expect(await violations(page)).toEqual([])
    await shoot(page, 'strip-day-1366x768')
    await page.keyboard.press('Escape')
    expect(await page.evaluate(`document.querySelector('.strip .more').open`)).toBe(false)
    await page.keyboard.press('Enter')
    await page.click('.strip .more >> text=Entries')
    await until(page, `${data}.page === 'entries' && ${data}.entries === '2'`)
    expect(await page.textContent('.strip .more summary')).toBe('Entries')
    const { run } = (await get<RunRow[]>('/api/runs')).find((r) => r.state === 'live')!
    const acts = (await get<ActRow[]>(`/api/runs/${run}/acts`)).map((a) => a.act)
    expect(acts).toContainEqual(expect.objectContaining({ kind: 'event', event: 'Karl Fischer', value: 0.021, unit: '%', of: 'A' }))
    const { settings } = await get<SettingsPage>('/api/skids/heron/settings')
    expect(settings.find((x) => x.path === 'streams.A.waterPpm')!.value).toBe(210)
    expect(faults).toEqual([])
    await page.context().close()
  })
})
