import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { RunRow, Upload } from '../../server/wire/index.ts'
import { chromiumPath, launch, open } from '../helpers/browser.ts'
import { command, root, type ServerProcess, startServer } from '../helpers/server-process.ts'

const chromium = chromiumPath()
const until = (page: Page, test: string) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout: 20_000, interval: 100, message: test }).toBe(true)
const data = 'document.querySelector("main").dataset'
const img = '<img src=x onerror="window.hit=1">'
const formula = '=HYPERLINK("http://rebound.example","open")'
const sql = "'); DROP TABLE run;--"

describe.runIf(chromium !== null)('text that would be code elsewhere', () => {
  const dir = mkdtempSync(join(tmpdir(), 'clearbore-injection-'))
  let browser: Browser
  let server: ServerProcess
  let run = 0
  const ask = async (method: string, path: string, body?: string | object, type = 'application/json') => {
    const reply = await fetch(new URL(path, server.url), {
      method,
      ...(body === undefined
        ? {}
        : { headers: { 'content-type': type }, body: typeof body === 'string' ? body : JSON.stringify(body) }),
    })
    expect(reply.status, `${method} ${path}: ${reply.ok ? '' : await reply.clone().text()}`).toBe(200)
    return reply
  }

  beforeAll(async () => {
    const log = join(dir, 'night.csv')
    const skid = join(root, 'fixtures/skids/heron.yaml')
    await command(['simulate', '--skid', skid, '--hours', '1', '--seed', '7', '--fouling', 'R1:linear:0.3:3', '--out', log])
    ;[browser, server] = await Promise.all([
      launch(chromium!),
      startServer(['--data', join(dir, 'store'), '--keys', join(dir, 'keys'), '--port', '0', '--speed', '600']),
    ])
    const skidText = readFileSync(skid, 'utf8')
      .replace(/^title: .*$/m, `title: '${img} ${sql.replaceAll("'", "''")}'`)
      .replace('title: reactor 1, lithiation', `title: '${img}'`)
    expect(skidText).toContain(img)
    const events = `time,kind,value,unit,person,note\n2031-01-13T20:10:00Z,karl-fischer,85,ppm,${img.replaceAll('"', "'")},"${formula.replaceAll('"', '""')}"\n`
    const begin = {
      title: `${img}${sql}`,
      skid: { name: `../../${img}.yaml`, text: skidText },
      events: { name: `${img}.csv`, text: events },
      start: null,
    }
    const { upload } = (await (await ask('POST', '/api/uploads', begin)).json()) as Upload
    const name = encodeURIComponent(`../../${img}.csv`)
    await ask('PUT', `/api/uploads/${upload}/logs/${name}`, readFileSync(log, 'utf8'), 'text/csv')
    const row = (await (await ask('POST', `/api/uploads/${upload}/import`)).json()) as RunRow
    run = row.run
    const state = async () => ((await (await ask('GET', `/api/runs/${run}`)).json()) as RunRow).state
    while ((await state()) === 'importing') await new Promise((done) => setTimeout(done, 100))
    await ask('POST', '/api/runs/1/acts', { kind: 'comment', alarm: null, text: `${img} ${formula}` })
    await ask('POST', '/api/runs/1/acts', { kind: 'comment', alarm: null, text: sql })
  })
  afterAll(async () => {
    await browser?.close()
    await server?.stop('SIGTERM')
    rmSync(dir, { recursive: true, force: true })
  })

  it('in titles, file names, notes, names and comments stands as text on every page and runs on none', async () => {
    const { page, faults } = await open(browser, server.url, { allow: /status of 403/ })
    await until(page, `${data}.ready === 'true'`)
    const links = (await page.evaluate(
      `[...document.querySelectorAll('.strip nav[aria-label="Pages"] a')].map((a) => a.getAttribute('href'))`,
    )) as string[]
    expect(links.length).toBeGreaterThan(3)
    const pages = [
      ...links,
      `#/replay/${run}`,
      `#/alarms/${run}`,
      `#/handover/${run}`,
      `#/trail/${run}`,
      '#/alarms/1',
      '#/handover/1',
      '#/trail/1',
      `#/${encodeURIComponent(img)}`,
      `#/replay/${encodeURIComponent(img)}`,
    ]
    for (const hash of pages) {
      await page.evaluate(`location.hash = ${JSON.stringify(hash)}`)
      await page.waitForTimeout(500)
      const found = await page.evaluate(
        `[window.hit ?? null, document.querySelectorAll('img, iframe, object, main script, [onerror], [onload]').length, document.querySelector('main') !== null]`,
      )
      expect(found, hash).toEqual([null, 0, true])
    }
    await page.evaluate(`location.hash = '#/replay'`)
    await until(page, `document.querySelector('tr[data-run="${run}"]') !== null`)
    expect(await page.textContent(`tr[data-run="${run}"] th`)).toContain(`${img}${sql}`)
    expect(await page.textContent(`tr[data-run="${run}"]`)).toContain(`../../${img}.csv`)
    await page.click(`tr[data-run="${run}"] a`)
    await until(page, `${data}.page === 'replay' && ${data}.ready === 'true'`)
    await page.evaluate(`location.hash = '#/handover/1'`)
    await until(page, `document.querySelector('main').textContent.includes(${JSON.stringify(`${img} ${formula}`)})`)
    expect(faults).toEqual([])
    await page.context().close()
  }, 60_000)

  it('reaches no table of the store and no path of the machine, and is no formula in a download', async () => {
    const rows = (await (await ask('GET', '/api/runs')).json()) as RunRow[]
    expect(rows.find((r) => r.run === run)).toMatchObject({ title: `${img}${sql}`, state: 'ended' })
    for (const of of [1, run])
      for (const file of ['alarms.csv', 'samples.csv', 'events.csv']) {
        const reply = await ask('GET', `/api/runs/${of}/export/${file}`)
        expect(reply.headers.get('content-disposition')).toMatch(/^attachment; filename="clearbore-[\w-]+-run\d+-\w+\.csv"$/)
        const text = await reply.text()
        // No cell begins with what a spreadsheet computes, numbers apart.
        expect(text).not.toMatch(/(^|,)"?[=@\t]|(^|,)"?[+-](?![\d.])/m)
      }
  })
})
