import { mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Report } from '../../server/core/report.ts'
import type { ActRow } from '../../server/wire/index.ts'
import { chromiumPath, launch, open, violations } from '../helpers/browser.ts'
import { smallPng } from '../helpers/png.ts'
import { root, type ServerProcess, startServer } from '../helpers/server-process.ts'

const chromium = chromiumPath()
if (chromium === null) process.stderr.write('no Chromium here (set CHROMIUM to its path): the flush page is not driven\n')
const pictures = join(root, process.env['PICTURES'] === '1' ? 'fixtures/pictures' : 'dist/pictures')
const speed = 480
const main = '(document.querySelector("main")?.dataset ?? {})'

/** What the night's operator records of what no instrument tells. */
const seen: Readonly<Record<string, string>> = {
  'outlet-diverted': 'in V-02',
  'path-proven': '0.3 bar at a tenth of the flow',
  'effluent-inactive': 'below 2 mmol/L',
  'no-heat-no-gas:gas': 'no gas seen',
  'effluent-blank': 'pH 7.4',
  'karl-fischer-1': '72',
  'karl-fischer-2': '64',
}

const until = (page: Page, test: string, timeout = 20_000) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout, interval: 60, message: test }).toBe(true)

describe.runIf(chromium !== null)("an operator's night on the real server, in a real browser", () => {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-night-'))
  let browser: Browser
  let server: ServerProcess
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

  /** One step as the page leads through it: what readings tell is waited for, what a person sees is recorded, then it is accepted. */
  async function accept(page: Page, step: string): Promise<void> {
    for (let turns = 0; turns < 200; turns++) {
      await until(
        page,
        `${main}.step !== '${step}' || document.querySelector('#next-action[aria-disabled="false"]') !== null ||
         [...document.querySelectorAll('.hold tr[data-point]')].every((r) => r.dataset.state === 'met' || r.dataset.point in ${JSON.stringify(seen)} || (r.dataset.point.startsWith('quench') && document.querySelector('[data-point="effluent-inactive"]').dataset.state !== 'met'))`,
      )
      const ready = page.locator('#next-action[aria-disabled="false"]')
      if ((await ready.count()) > 0) {
        await ready.click()
        await until(page, `${main}.step !== '${step}' || ${main}.flush !== 'running'`)
        return
      }
      const asked = (await page.evaluate(
        `document.querySelector('.check').hidden ? '' : document.querySelector('#check-point').value`,
      )) as string
      if (seen[asked] === undefined) {
        // The page is a moment behind the server.
        await page.waitForTimeout(60)
        continue
      }
      await page.fill('#check-value', seen[asked])
      await page.fill('#check-source', 'at the skid')
      await page.click('#check-met')
      await until(page, `document.querySelector('.hold tr[data-point="${asked}"]')?.dataset.state === 'met'`)
    }
    throw new Error(`${step} was not accepted`)
  }

  // PRO-10, PRO-34
  it('fouling comes, alarm, acknowledge, plan, flush step by step, water refused out of turn, recovery, production again', async () => {
    const { page, faults } = await open(browser, server.url)
    await until(page, `document.querySelector('.alarms li[data-kind="fouling"][data-state="UNACK"]') !== null`)
    const ack = page.locator('.alarms li[data-kind="fouling"] button.ack').first()
    await ack.focus()
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('.alarms li[data-kind="fouling"]').dataset.state === 'ACKED'`)
    await until(page, `document.querySelector('#open-plan') !== null`)
    // The deposit is given time to matter before it is flushed.
    await until(page, `[...document.querySelectorAll('.answer .far')].some((x) => /1\\.[2-9]\\d/.test(x.textContent))`)
    await page.click('#open-plan')
    await page.click('#go-flush')
    await until(page, `${main}.page === 'flush' && document.querySelectorAll('.plan-body [data-step]').length === 7`)
    expect(await violations(page)).toEqual([])

    // By keyboard: the one action, from the top of the page.
    await page.locator('#begin').focus()
    await page.keyboard.press('Enter')
    await until(page, `${main}.step === 'F0' && ${main}.stepState === 'running'`)
    await accept(page, 'F0')
    await page.click('#next-action')
    await until(page, `${main}.step === 'F1' && ${main}.stepState === 'running'`)

    // Water asked for while F1 runs: refused, said why, nothing begins.
    await page.locator('[data-ask="F3"]').focus()
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('.chamber[data-step="F3"] .tag')?.textContent === 'REFUSED'`)
    expect(await page.textContent('.refusal')).toMatch(/F3 water: refused.*no water before F1 is accepted/s)
    expect(await page.textContent('.answer.now .far')).toBe('Wait, no water')
    expect(await page.textContent('.cautions')).toContain('Do not admit water before displacement and warm-up are both confirmed.')
    expect(await violations(page)).toEqual([])
    await shoot(page, 'flush-day-1920x1080')
    // Abort is in sight however far the page is scrolled, on the small screen too.
    await page.setViewportSize({ width: 1366, height: 768 })
    for (const y of [0, 5000]) {
      await page.evaluate(`window.scrollTo(0, ${y})`)
      expect(
        await page.evaluate(
          `(({ top, bottom }) => top >= 0 && bottom <= innerHeight)(document.querySelector('#abort').getBoundingClientRect())`,
        ),
      ).toBe(true)
    }
    await page.evaluate('window.scrollTo(0, 0)')
    await page.setViewportSize({ width: 1920, height: 1080 })
    await accept(page, 'F1')

    for (const step of ['F2', 'F3', 'F4', 'F5', 'F6']) {
      await until(page, `${main}.step === '${step}' && ${main}.stepState === 'open'`)
      await page.click('#next-action')
      await until(page, `${main}.step === '${step}' && ${main}.stepState === 'running'`)
      if (step === 'F3') {
        // A reload in the midst of it: the course is the server's.
        await page.reload()
        await until(page, `${main}.step === 'F3' && ${main}.stepState === 'running'`)
      }
      await accept(page, step)
    }
    await until(page, `${main}.flush === 'complete'`)
    await until(page, `document.querySelector('.recovery [data-verdict]')?.dataset.verdict === 'restored'`)
    expect(await violations(page)).toEqual([])
    await page.goto(`${server.url}#/watch`)
    await until(page, `${main}.page === 'watch' && document.querySelector('.strip .facts').textContent.includes('Production')`)

    const report = await get<Report>('/api/runs/1/report')
    const flush = report.flushes[0]!
    expect(flush.steps.map((s) => s.state)).toEqual([
      'accepted',
      'accepted',
      'accepted',
      'accepted',
      'accepted',
      'accepted',
      'accepted',
    ])
    expect(flush.refusals.map((r) => [r.step, r.person])).toEqual([['F3', 'demo operator']])
    const { before, feeds } = flush.recovery[0]!
    expect(before).toBeGreaterThan(1.15)
    expect(Math.abs(feeds! - (1 + 0.03 * (before! - 1)))).toBeLessThan(0.03)
    const acts = await get<ActRow[]>('/api/runs/1/acts')
    expect(acts.filter((a) => a.act.kind === 'flush-check').length).toBe(7)
    expect(faults).toEqual([])
    await page.context().close()
  }, 120_000)

  it('is clean at night on a laptop too, and left a picture under 300 kB', async () => {
    const { page, faults } = await open(browser, `${server.url}#/flush`, { width: 1366, height: 768, night: true })
    await until(page, `${main}.page === 'flush' && ${main}.ready === 'true'`)
    expect(await violations(page)).toEqual([])
    expect(readFileSync(join(pictures, 'flush-day-1920x1080.png')).length).toBeLessThan(300_000)
    expect(faults).toEqual([])
    await page.context().close()
  })
})
