import { execFileSync } from 'node:child_process'
import { readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { type Browser, chromium, type Page } from 'playwright-core'

/** Path of the Chromium to drive: `CHROMIUM` in the environment, or the one on the path. Null where there is none. */
export function chromiumPath(): string | null {
  const set = process.env['CHROMIUM']
  if (set !== undefined && set !== '') return set
  for (const name of ['chromium', 'chromium-browser', 'google-chrome']) {
    try {
      return execFileSync('sh', ['-c', `command -v ${name}`], { encoding: 'utf8' }).trim()
    } catch {
      // Not this one; try the next name.
    }
  }
  return null
}

export const launch = (executablePath: string): Promise<Browser> =>
  chromium.launch({
    executablePath,
    chromiumSandbox: false,
    args: [
      '--no-sandbox',
      '--disable-gpu',
      '--disable-quic',
      '--no-first-run',
      '--disable-background-networking',
      '--disable-component-update',
      '--disable-sync',
      '--disable-dev-shm-usage',
      '--force-color-profile=srgb',
      '--disable-lcd-text',
    ],
  })

export interface Opened {
  readonly page: Page
  /** Console errors and uncaught errors so far. */
  readonly faults: string[]
}

/** A fresh context, as a first visitor. Refused connections while a test has stopped its server are expected and left out on request. */
export async function open(
  browser: Browser,
  url: string,
  o: { width?: number; height?: number; night?: boolean; downloads?: boolean; allow?: RegExp; init?: () => void } = {},
): Promise<Opened> {
  const context = await browser.newContext({
    viewport: { width: o.width ?? 1920, height: o.height ?? 1080 },
    timezoneId: 'America/New_York',
    colorScheme: o.night === true ? 'dark' : 'light',
    reducedMotion: 'reduce',
    acceptDownloads: o.downloads === true,
  })
  const page = await context.newPage()
  if (o.init !== undefined) await page.addInitScript(o.init)
  const faults: string[] = []
  const note = (text: string) => {
    if (o.allow?.test(text) !== true) faults.push(text)
  }
  page.on('console', (m) => {
    if (m.type() === 'error') note(m.text())
  })
  page.on('pageerror', (e) => note(String(e)))
  await page.goto(url)
  return { page, faults }
}

const axe = readFileSync(fileURLToPath(new URL('../../node_modules/axe-core/axe.min.js', import.meta.url)), 'utf8')

/** Serious and critical violations of axe-core on the page as it stands, one line each. */
export async function violations(page: Page): Promise<string[]> {
  await page.evaluate(axe)
  return page.evaluate(async () => {
    const run = (
      window as unknown as {
        axe: { run(): Promise<{ violations: { id: string; impact: string; nodes: { html: string; failureSummary: string }[] }[] }> }
      }
    ).axe
    const result = await run.run()
    return result.violations
      .filter((v) => v.impact === 'serious' || v.impact === 'critical')
      .flatMap((v) => v.nodes.map((n) => `${v.id}: ${n.html.slice(0, 160)} ${n.failureSummary}`))
  })
}
