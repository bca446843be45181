import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { chromiumPath, launch, open, violations } from '../helpers/browser.ts'
import { type PageServer, servePages } from '../helpers/page-server.ts'
import { alarmOf, sceneOf } from '../helpers/scene.ts'

const chromium = chromiumPath()
const until = (page: Page, test: string) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout: 10_000, interval: 100, message: test }).toBe(true)
const scene = sceneOf({ gap: true, alarms: [alarmOf(1, { segment: 'S3' })] })

describe.runIf(chromium !== null)('the page of all trends', () => {
  let browser: Browser
  let server: PageServer
  beforeAll(async () => {
    ;[browser, server] = await Promise.all([launch(chromium!), servePages(scene)])
  })
  afterAll(async () => {
    await browser?.close()
    await server?.close()
  })

  it.each([
    [1920, 1080, false],
    [1366, 768, true],
  ])(
    'at %i x %i shows every trend of a segment, points at one moment in all at once, zooms by key, and comes back',
    async (width, height, night) => {
      const { page, faults } = await open(browser, `${server.url}/#/trends/1`, { width, height, night })
      await until(page, `document.querySelector('main').dataset.ready === 'true'`)
      const place = page.getByRole('group', { name: 'Segment of the trends' }).getByRole('button', { name: 'S3', exact: true })
      await place.click()
      expect(await place.getAttribute('aria-pressed')).toBe('true')
      const kinds = await page
        .locator('.panel:not([hidden]) canvas[data-kind]')
        .evaluateAll((all) => all.map((c) => (c as HTMLElement).dataset['kind']))
      expect(kinds).toEqual(['ratio', 'dp', 'temperature', 'pressure', 'flow', 'feed-ratio', 'charts'])
      await until(page, `document.querySelector('canvas[data-kind=charts]').dataset.points > 0`)

      // DSP-10: name, value and unit of each line where the reader points, by mouse and by key.
      const values = () => page.locator('.panel:not([hidden]) .values').allTextContents()
      expect((await values()).every((v) => v === '')).toBe(true)
      const box = (await page.locator('canvas[data-kind=dp]').boundingBox())!
      await page.mouse.move(box.x + box.width * 0.4, box.y + box.height * 0.5)
      await expect.poll(async () => (await values()).filter((v) => /\d/.test(v)).length).toBe(kinds.length)
      await page.mouse.move(2, 2)
      await expect.poll(async () => (await values()).every((v) => v === '')).toBe(true)
      const ratio = page.locator('canvas[data-kind=ratio]')
      await ratio.focus()
      for (let i = 0; i < 40; i++) await page.keyboard.press(',')
      expect((await values())[0]).toMatch(/^S3 \d\.\d\d/)

      const shown = async () => ratio.evaluate((c) => Number(c.dataset['to']) - Number(c.dataset['from']))
      const whole = await shown()
      await page.keyboard.press('+')
      await expect.poll(shown).toBeCloseTo(whole / 2, -3)
      await page.getByRole('button', { name: /^Back to/ }).click()
      await expect.poll(shown).toBeCloseTo(whole, -3)
      expect(await page.evaluate(`document.documentElement.scrollWidth <= document.documentElement.clientWidth`)).toBe(true)
      expect(await violations(page)).toEqual([])
      expect(faults).toEqual([])
      await page.context().close()
    },
  )
})
