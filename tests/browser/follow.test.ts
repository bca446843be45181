import { appendFileSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { RunRow } from '../../server/wire/index.ts'
import { chromiumPath, launch, open } from '../helpers/browser.ts'
import { command, type ServerProcess, startServer } from '../helpers/server-process.ts'

const chromium = chromiumPath()
const until = (page: Page, test: string) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout: 20_000, interval: 100, message: test }).toBe(true)
const data = 'document.querySelector("main").dataset'

describe.runIf(chromium !== null)('a log that a data logger is still appending to', () => {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-follow-'))
  const log = join(dir, 'logger.csv')
  let rows: string[] = []
  let browser: Browser
  let server: ServerProcess
  let writer: NodeJS.Timeout
  let next = 0
  let fromMs = 0

  beforeAll(async () => {
    // Forty minutes of which thirty-nine have happened: the writer appends the last one as it happens.
    fromMs = Math.floor(Date.now() / 1000) * 1000 - 39 * 60_000
    const from = new Date(fromMs).toISOString().replace('.000', '')
    const whole = join(dir, 'whole.csv')
    await command([
      'simulate',
      '--skid',
      'fixtures/skids/heron.yaml',
      '--hours',
      '0.67',
      '--seed',
      '3',
      '--from',
      from,
      '--out',
      whole,
    ])
    rows = readFileSync(whole, 'utf8').split('\n')
    next = 39 * 60
    writeFileSync(log, `${rows.slice(0, next).join('\n')}\n`)
    ;[browser, server] = await Promise.all([
      launch(chromium!),
      startServer([
        ...['--skid', 'fixtures/skids/heron.yaml', '--follow', log, '--skid', 'fixtures/skids/filter-rig.yaml'],
        ...['--data', join(dir, 'store'), '--port', '0'],
      ]),
    ])
  })
  afterAll(async () => {
    clearInterval(writer)
    await browser?.close()
    await server?.stop('SIGTERM')
    rmSync(dir, { recursive: true, force: true })
  })

  it('is watched as a live skid with ratios from its own baseline, row by row, half-written rows included, beside a second skid', async () => {
    const runs = async () => (await (await fetch(new URL('/api/runs', server.url))).json()) as RunRow[]
    const heron = (await runs()).find((r) => r.skid === 'heron')!.run
    const { page, faults } = await open(browser, `${server.url}#/watch/${heron}`)
    await until(page, `${data}.ready === 'true'`)
    expect(await page.textContent('.strip .facts')).not.toContain('DEMO')
    await until(page, `[...document.querySelectorAll('.fig.seg')].every((f) => f.dataset.ratio !== '')`)
    const rowsNow = async () => (await runs()).find((r) => r.run === heron)!.rows
    const first = await rowsNow()
    writer = setInterval(() => {
      // A row each second, half of it late, as from a logger that flushes when it likes.
      for (; fromMs + 1000 * (next - 1) <= Date.now(); next++) {
        const row = `${rows[next] ?? ''}\n`
        appendFileSync(log, row.slice(0, 40))
        appendFileSync(log, row.slice(40))
      }
    }, 200)
    await until(
      page,
      `document.querySelector('main').dataset.cut === 'no' && document.querySelectorAll('.comb path')[1].getAttribute('d').length > 30`,
    )
    await expect.poll(rowsNow, { timeout: 10_000 }).toBeGreaterThan(first + 3)
    // The other skid is one press away, and is told to be invented.
    const other = (await runs()).find((r) => r.run !== heron)!
    await page.click(`nav[aria-label="Live skids"] a:has-text("${other.skid}")`)
    await until(page, `${data}.ready === 'true' && document.querySelector('.strip .skid').textContent === '${other.skid}'`)
    expect(await page.textContent('#person')).toBe('Sign in to act')
    expect(faults).toEqual([])
    await page.context().close()
  })
})
