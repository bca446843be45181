import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { chromiumPath, launch, open, violations } from '../helpers/browser.ts'
import { demoSession, type PageServer, servePages } from '../helpers/page-server.ts'
import { alarmOf, type Scene, sceneOf, t0 } from '../helpers/scene.ts'

const chromium = chromiumPath()
const hour = 3_600_000
const until = (page: Page, test: string) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout: 10_000, interval: 100, message: test }).toBe(true)
const data = 'document.querySelector("main").dataset'
const many = Array.from({ length: 12 }, (_, i) =>
  alarmOf(i + 1, {
    priority: (['high', 'medium', 'low'] as const)[i % 3]!,
    raisedMs: t0 + 5.9 * hour + i * 15_000,
    kind: i === 0 ? 'exotherm' : 'pressure-limit',
    unit: 'bar',
    value: 14.2,
    limit: 14,
  }),
)

/** States that a real skid shows once a year, set at will over the real wire: what the page must say then. */
describe.runIf(chromium !== null)('the pages in their rare states', () => {
  let browser: Browser
  let server: PageServer
  beforeAll(async () => {
    ;[browser, server] = await Promise.all([launch(chromium!), servePages(sceneOf())])
  })
  afterAll(async () => {
    await browser?.close()
    await server?.close()
  })
  async function at(scene: Scene, size = { width: 1366, height: 768 }, night = false) {
    server.show(scene)
    const opened = await open(browser, server.url, { ...size, night })
    await until(opened.page, `${data}.ready === 'true' && document.querySelector('#trend').dataset.points !== undefined`)
    return opened
  }
  const fits = (page: Page) => page.evaluate(`document.documentElement.scrollWidth <= document.documentElement.clientWidth`)

  it.each([
    ['one segment', sceneOf({ segments: 1, ratio: 1.2, alarms: [alarmOf(1, { segment: 'S1' })] }), 1366, 768],
    ['twelve segments', sceneOf({ segments: 12, alarms: [alarmOf(1)] }), 1920, 1080],
    [
      'names that do not end',
      sceneOf({ segments: 5, longNames: true, alarms: [alarmOf(1, { segment: 'REACTOR-LOOP-NORTH-02' })] }),
      1366,
      768,
    ],
    ['a wall of 3840 pixels', sceneOf({ alarms: [alarmOf(1)] }), 3840, 2160],
    ['a tablet of 1024 pixels', sceneOf({ alarms: [alarmOf(1)] }), 1024, 768],
  ] as const)(
    '%s: nothing scrolls sideways, every segment has its figure, no serious violation',
    async (_name, scene, width, height) => {
      const { page, faults } = await at(scene, { width, height }, width === 1366)
      expect(await fits(page)).toBe(true)
      expect(await page.locator('.fig.seg').count()).toBe(scene.facts.segments.length)
      // Text is never smaller than 16 arc minutes at its distance: 17 px at 1920, 14.5 px on a laptop.
      const least = (await page.evaluate(
        `Math.min(...[...document.querySelectorAll('body *')].filter((e) => e.childElementCount === 0 && e.textContent.trim() !== '' && !e.closest('svg, .vh, noscript, script')).map((e) => parseFloat(getComputedStyle(e).fontSize)))`,
      )) as number
      expect(least).toBeGreaterThanOrEqual(width === 1366 ? 14.4 : 17)
      expect(await violations(page)).toEqual([])
      expect(faults).toEqual([])
      await page.context().close()
    },
  )

  it('a window made narrower takes its charts with it', async () => {
    const { page, faults } = await at(sceneOf({ alarms: [alarmOf(1)] }), { width: 1920, height: 1080 })
    await page.setViewportSize({ width: 1366, height: 768 })
    await until(
      page,
      `document.querySelector('#trend').getBoundingClientRect().right <= document.querySelector('.person').getBoundingClientRect().left`,
    )
    await until(
      page,
      `document.querySelector('.bores').getBoundingClientRect().right <= document.querySelector('.person').getBoundingClientRect().left`,
    )
    expect(await fits(page)).toBe(true)
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('a ratio that is not known is hatched and named, a bad sensor too; neither shows a healthy figure', async () => {
    const { page, faults } = await at(sceneOf({ ratio: null, badSensor: true, alarms: [alarmOf(1)] }))
    expect(await page.locator('.answer .far').nth(1).textContent()).toBe('not known')
    expect(await page.locator('.fig.seg', { hasText: 'segment 2' }).textContent()).toContain('no ratio')
    expect(await page.locator('[fill="url(#not-known)"]').count()).toBeGreaterThan(0)
    expect(await page.locator('.lab', { hasText: 'TT-022 bad' }).count()).toBe(1)
    await until(page, `document.querySelector('#trend').dataset.gaps === '1'`)
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('a flood is named and counted, its first alarm pinned on top; one press acknowledges one alarm', async () => {
    const { page, faults } = await at(sceneOf({ alarms: many }))
    await until(page, `document.querySelector('.al').dataset.flood === 'true'`)
    expect(await page.textContent('.al h2')).toBe('Flood: 12 alarms since 02:54')
    expect(await page.getAttribute('.alarms > li:first-child', 'data-alarm')).toBe('1')
    expect(await page.locator('.alarms > li:first-child .tag:visible').allTextContents()).toEqual(['FIRST', 'MOST URGENT'])
    await page.locator('.alarms > li:nth-child(2) .ack').click()
    await expect.poll(() => server.posted.at(-1)).toEqual({ kind: 'acknowledge', alarm: 12 })
    expect(server.posted.length).toBe(1)
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('no row moves while the pointer is on the list, and the new one is on top as soon as it leaves', async () => {
    const { page } = await at(sceneOf({ alarms: [alarmOf(1)] }))
    await page.hover('.alarms')
    server.show(sceneOf({ alarms: [alarmOf(1), alarmOf(2, { kind: 'flow', raisedMs: t0 + 5 * hour })] }))
    await until(page, `document.querySelectorAll('.alarms > li').length === 2`)
    expect(await page.getAttribute('.alarms > li:first-child', 'data-alarm')).toBe('1')
    await page.mouse.move(10, 10)
    server.show(sceneOf({ alarms: [alarmOf(1), alarmOf(2, { kind: 'flow', raisedMs: t0 + 5 * hour })] }))
    await until(page, `document.querySelector('.alarms > li').dataset.alarm === '2'`)
    await page.context().close()
  })

  it('a silent server and a silent source are told apart, both within two seconds', async () => {
    const { page, faults } = await at(sceneOf({ alarms: [alarmOf(1)] }))
    server.show(sceneOf({ cutOff: true, alarms: [alarmOf(1)] }))
    await until(page, `${data}.cut === 'source'`)
    expect(await page.textContent('.cut')).toContain('its source of data is silent')
    server.show(sceneOf({ alarms: [alarmOf(1)] }))
    await until(page, `${data}.cut === 'no'`)
    const comb = await page.getAttribute('.comb path:nth-child(2)', 'd')
    server.silence(true)
    const from = Date.now()
    await until(page, `${data}.cut === 'link'`)
    expect(Date.now() - from).toBeLessThan(3000)
    expect(await page.textContent('.cut')).toContain('the server does not answer')
    expect(await page.getAttribute('.comb path:nth-child(2)', 'd')).toBe(comb)
    server.silence(false)
    await until(page, `${data}.cut === 'no'`)
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('without a baseline it promises nothing, and without a run it says so and shows the first that comes', async () => {
    const { page, faults } = await at(sceneOf({ empty: true, baseline: false }))
    expect(await page.locator('.answer .far').allTextContents()).toEqual(['not yet', 'not known', 'not known', 'Carry on'])
    server.runs(false)
    await page.reload()
    await until(page, `document.querySelector('main').textContent.includes('No run yet')`)
    server.runs(true)
    await until(page, `${data}.ready === 'true'`)
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('remembers the theme, says who is at the screen, and sends nothing for whom nobody knows', async () => {
    const { page, faults } = await at(sceneOf({ alarms: [alarmOf(1)] }))
    expect(await page.getAttribute('html', 'data-theme')).toBe('day')
    expect(await page.textContent('.strip .who')).toBe('demo operatorengineerDEMO')
    await page.click('#theme')
    server.signed({ ...demoSession, person: null, how: 'none', hasPeople: true })
    await page.reload()
    await until(page, `${data}.ready === 'true'`)
    expect([await page.getAttribute('html', 'data-theme'), await page.textContent('#person')]).toEqual(['night', 'Sign in to act'])
    const before = server.posted.length
    await page.click('.ack')
    await until(page, `document.querySelector('.refused').textContent.includes('sign in first')`)
    expect(server.posted.length).toBe(before)
    expect(await page.evaluate(`document.activeElement.id`)).toBe('person')
    expect(faults).toEqual([])
    await page.context().close()
  })
})
