import type { Browser, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { everyState, floodOf, handOverNote, inState, performanceOf, storyOf } from '../helpers/alarm-scenes.ts'
import { chromiumPath, launch, open, violations } from '../helpers/browser.ts'
import { type PageServer, servePages } from '../helpers/page-server.ts'
import { alarmOf, type Scene, sceneOf, t0 } from '../helpers/scene.ts'

const chromium = chromiumPath()
const hour = 3_600_000
const until = (page: Page, test: string) =>
  expect.poll(async () => page.evaluate(`Boolean(${test})`), { timeout: 10_000, interval: 50, message: test }).toBe(true)

/** In place of the browser's sound: writes down every stroke and is silent until a gesture, as a browser is. */
function standInForSound(): void {
  const strokes: { hz: number; at: number }[] = []
  Object.assign(window, { strokes })
  const param = () => ({ value: 0, setValueAtTime: () => undefined, linearRampToValueAtTime: () => undefined })
  class Sound extends EventTarget {
    state = 'suspended'
    destination = {}
    get currentTime(): number {
      return performance.now() / 1000
    }
    resume(): Promise<void> {
      if (navigator.userActivation.hasBeenActive) this.state = 'running'
      this.dispatchEvent(new Event('statechange'))
      return Promise.resolve()
    }
    createGain(): object {
      return { gain: param(), connect: (to: object) => to }
    }
    createOscillator(): object {
      const frequency = param()
      return {
        frequency, type: '', connect: (to: object) => to, stop: () => undefined,
        start: (at: number) => strokes.push({ hz: frequency.value, at }),
      } // biome-ignore format: short
    }
  }
  Object.assign(window, { AudioContext: Sound })
}

describe.runIf(chromium !== null)('alarms in the hands of an operator', () => {
  let browser: Browser
  let server: PageServer
  beforeAll(async () => {
    ;[browser, server] = await Promise.all([launch(chromium!), servePages(sceneOf())])
  })
  afterAll(async () => {
    await browser?.close()
    await server?.close()
  })
  async function at(scene: Scene, o: { hash?: string; width?: number; height?: number; night?: boolean; init?: () => void } = {}) {
    server.show(scene)
    server.refuse(null)
    const { hash, ...size } = { width: 1366, height: 768, ...o }
    const opened = await open(browser, `${server.url}/${hash ?? ''}`, size)
    await until(opened.page, `document.querySelector('main') && document.querySelector('main').dataset.ready`)
    return opened
  }
  const row = (page: Page, id: number) => page.locator(`.alarms > li[data-alarm="${id}"]`)
  const focused = (page: Page) => page.evaluate(`document.activeElement.textContent`)

  // ALM-08, USR-05, ALM-10
  it('shelves by keyboard alone: reason picked and written, minutes up to the limit, a refusal with its mend, focus back where it was', async () => {
    const { page, faults } = await at(sceneOf({ alarms: [alarmOf(1), alarmOf(2, { kind: 'flow', raisedMs: t0 + 5 * hour })] }))
    await row(page, 2).locator('.help').focus()
    await page.keyboard.press('ArrowDown')
    expect(await page.evaluate(`document.activeElement.closest('li').dataset.alarm`)).toBe('1')
    await page.keyboard.press('p')
    const dialog = page.locator('dialog[open]')
    expect(await dialog.locator('h2').textContent()).toContain('Put aside: S2 flow resistance rising')
    expect(await violations(page)).toEqual([])
    server.refuse(() => 'a reason of at least 5 characters is required')
    await page.fill('#ask-minutes', '20')
    await page.focus('#ask-words')
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('dialog .refused').textContent.includes('say in a few words why')`)
    server.refuse(null)
    await page.selectOption('#ask-pick', 'instrument under repair')
    await page.fill('#ask-words', 'order 4417')
    await page.keyboard.press('Enter')
    await until(page, `document.querySelector('dialog') === null`)
    expect(server.posted.at(-1)).toEqual({ kind: 'shelve', alarm: 1, minutes: 20, reason: 'instrument under repair: order 4417' })
    expect(await page.evaluate(`document.activeElement.closest('li').dataset.alarm`)).toBe('1')
    // Escape leaves everything as it was.
    const n = server.posted.length
    await page.keyboard.press('p')
    await page.keyboard.press('Escape')
    await until(page, `document.querySelector('dialog') === null`)
    expect([server.posted.length, await focused(page)]).toEqual([n, 'Acknowledge'])
    expect(faults).toEqual([])
    await page.context().close()
  })

  // ALM-08
  it('shows a shelved alarm with who, why and the time left, counts it on every page, and offers to take it back or to extend it', async () => {
    const scene = sceneOf({ alarms: everyState() })
    const { page, faults } = await at(scene, { width: 1920, height: 1080 })
    const text = await row(page, 6).locator('.w').textContent()
    expect(text).toContain('21 min left')
    expect(text).toContain('instrument under repair: order 4417')
    await row(page, 6).locator('button', { hasText: 'Unshelve' }).click()
    await page.fill('#ask-words', 'repaired and checked')
    await page.keyboard.press('Enter')
    await expect.poll(() => server.posted.at(-1)).toEqual({ kind: 'unshelve', alarm: 6, reason: 'repaired and checked' })
    await row(page, 5).locator('button', { hasText: 'Reset' }).click()
    await page.fill('#ask-words', 'valve was half shut, opened')
    await page.keyboard.press('Enter')
    await expect.poll(() => server.posted.at(-1)).toEqual({ kind: 'reset', alarm: 5, reason: 'valve was half shut, opened' })
    await row(page, 8).locator('button', { hasText: 'Into service' }).click()
    await page.fill('#ask-words', 'meter back in')
    await page.keyboard.press('Enter')
    await expect.poll(() => server.posted.at(-1)).toEqual({ kind: 'in-service', key: 'flow:S8', reason: 'meter back in' })
    server.answer('/runs/1/alarm-performance', performanceOf())
    server.answer('/runs/1/hand-over', handOverNote())
    for (const hash of ['#/watch', '#/replay', '#/replay/1', '#/alarms', '#/handover']) {
      await page.goto(`${server.url}/${hash}`)
      await until(page, `document.querySelector('.counts').textContent.includes('1 shelved')`)
      expect(await page.textContent('.counts')).toContain('1 suppressed1 out of service')
    }
    expect(faults).toEqual([])
    await page.context().close()
  })

  // ALM-08
  it('says of a HIGH alarm that its class may not be shelved, and takes it out of service with a reason', async () => {
    const { page } = await at(sceneOf({ alarms: [inState(1, 'UNACK', { priority: 'high', shelveMaxMin: 0 })] }))
    await row(page, 1).locator('button', { hasText: 'Put aside' }).click()
    expect(await page.textContent('dialog')).toContain('HIGH alarms may not be shelved')
    expect(await page.isDisabled('input[value=shelve]')).toBe(true)
    await page.fill('#ask-words', 'thermocouple is being changed')
    await page.keyboard.press('Enter')
    await expect
      .poll(() => server.posted.at(-1))
      .toEqual({ kind: 'out-of-service', key: 'flow:S1', reason: 'thermocouple is being changed' })
    await page.context().close()
  })

  // ALM-07
  it('acknowledges one by one, together only the rows that are on screen, and none that is not', async () => {
    const { page } = await at(sceneOf({ alarms: floodOf(40) }))
    const before = server.posted.length
    await page.evaluate(`[...document.querySelectorAll('.alarms > li .ack:not([hidden])')].at(-1).click()`)
    await until(page, `[...document.querySelectorAll('.alarms .refused')].some((r) => r.textContent.includes('not on screen'))`)
    expect(server.posted.length).toBe(before)
    const seen = (await page.evaluate(`(() => {
      const top = Math.max(document.querySelector('.strip').getBoundingClientRect().bottom, document.querySelector('.person > .answer').getBoundingClientRect().bottom)
      const end = document.querySelector('.foot').getBoundingClientRect().top
      return [...document.querySelectorAll('.alarms > li')].filter((li) => {
        const box = li.querySelector('.al-head').getBoundingClientRect()
        return box.top >= top && box.bottom <= end && !li.querySelector('.ack').hidden
      }).map((li) => Number(li.dataset.alarm))
    })()`)) as number[]
    expect(seen.length).toBeGreaterThanOrEqual(2)
    expect(seen.length).toBeLessThan(12)
    expect(await page.textContent('#ack-seen')).toBe(`Acknowledge the ${seen.length} on screen`)
    await page.click('#ack-seen')
    await expect.poll(() => server.posted.length).toBe(before + seen.length)
    expect((server.posted.slice(before) as { kind: string; alarm: number }[]).map((b) => b.alarm)).toEqual(seen)
    await page.context().close()
  })

  // USR-14, ALM-02
  it('help is one press: this alarm’s check, action, time, consequence, causes, evidence for and not excluded, and that nobody of the site has reviewed the text', async () => {
    const help = { ...alarmOf(1).help!, review: 'default, not reviewed for this site' }
    const { page } = await at(sceneOf({ alarms: [alarmOf(1, { help })] }), { night: true })
    await row(page, 1).locator('.help').click()
    const text = (await row(page, 1).locator('.details').textContent())!
    for (const part of [
      help.check,
      help.action,
      help.consequence,
      help.causes,
      '30 min to respond',
      'default, not reviewed for this site',
    ])
      expect(text).toContain(part)
    expect(text).toContain('only this segment rises, its neighbours are flat')
    expect(text).toContain('Not ruled outsalt at the mixing point')
    expect(await row(page, 1).locator('.help').getAttribute('aria-expanded')).toBe('true')
    expect(await violations(page)).toEqual([])
    await page.context().close()
  })

  // USR-08
  it('from an alarm it is one press to its trend around the raise and one to what came before, with onset, first-out and a replay of the moment', async () => {
    const alarm = alarmOf(2, { raisedMs: t0 + 4 * hour })
    const first = alarmOf(1, { kind: 'flow', cause: null, raisedMs: t0 + 3.9 * hour })
    server.answer('/runs/1/alarms/2/before', storyOf(alarm, first))
    const { page, faults } = await at(sceneOf({ alarms: [first, alarm] }))
    await row(page, 2).locator('button', { hasText: 'Trend' }).click()
    await until(
      page,
      `document.querySelector('main').dataset.looked === '2' && document.querySelector('main').dataset.follows === 'false'`,
    )
    expect(await page.getAttribute('#trend', 'data-segment')).toBe('S2')
    // From 20 min before the earliest onset (22:42 UTC, 23:42 at the plant) on.
    expect(await page.getAttribute('#trend', 'aria-label')).toContain('13 Jan 2031 23:22')
    await page.click('button:has-text("Back to now")')
    await until(page, `document.querySelector('main').dataset.follows === 'true'`)
    await row(page, 2).locator('button', { hasText: 'Before' }).click()
    await until(page, `document.querySelectorAll('dialog tbody tr').length === 4`)
    const text = (await page.textContent('dialog'))!
    expect(text).toContain('Beganabout 00:00, between 13 Jan 23:42 and 00:15 (90 %)')
    expect(text).toContain('First outS2 flow low at 00:54:00')
    expect(text).toContain('drum change 4: A-31 to A-32')
    expect(await violations(page)).toEqual([])
    await page.click('dialog a:has-text("Replay at this moment")')
    await until(page, `document.querySelector('main').dataset.shownMs === '${t0 + 4 * hour}'`)
    expect(faults).toEqual([])
    await page.context().close()
  })

  // ALM-14
  it('a flood of 40 pins the first and the most urgent, labelled and in sight however far one scrolls', async () => {
    const { page, faults } = await at(sceneOf({ alarms: floodOf(40) }))
    expect(await page.textContent('.al h2')).toBe('Flood: 40 alarms since 02:52')
    const ids = () => page.evaluate(`[...document.querySelectorAll('.alarms > li')].map((li) => Number(li.dataset.alarm))`)
    expect(((await ids()) as number[]).slice(0, 3)).toEqual([1, 3, 40])
    expect(await row(page, 1).locator('.tag:visible').allTextContents()).toEqual(['FIRST'])
    expect(await row(page, 3).locator('.tag:visible').allTextContents()).toEqual(['MOST URGENT'])
    await page.mouse.move(5, 400)
    await page.mouse.wheel(0, 1500)
    const inSight = (id: number) =>
      `(() => { const b = document.querySelector('.alarms > li[data-alarm="${id}"]').getBoundingClientRect(); return b.top >= document.querySelector('.strip').getBoundingClientRect().bottom && b.bottom <= document.querySelector('.foot').getBoundingClientRect().top })()`
    await until(page, `window.scrollY > 600 && ${inSight(1)} && ${inSight(3)}`)
    expect(await violations(page)).toEqual([])
    expect(faults).toEqual([])
    await page.context().close()
  })

  // ALM-14
  it.each(['pointer', 'focus'])(
    'nothing moves under the %s, not even when a flood begins; pins come when it lets go',
    async (how) => {
      const few = floodOf(5)
      const { page } = await at(sceneOf({ alarms: few }), { width: 1920, height: 1080 })
      const ids = async () =>
        (await page.evaluate(`[...document.querySelectorAll('.alarms > li')].map((li) => Number(li.dataset.alarm))`)) as number[]
      if (how === 'pointer') await page.hover('.alarms > li:nth-child(2) .t')
      else await row(page, 4).locator('.help').focus()
      const shown = await ids()
      expect(shown).toEqual([5, 4, 3, 2, 1])
      server.show(sceneOf({ alarms: floodOf(16) }))
      await until(page, `document.querySelectorAll('.alarms > li').length === 16`)
      expect((await ids()).slice(0, 5)).toEqual(shown)
      expect(await row(page, 1).locator('.tag:visible').allTextContents()).toEqual(['FIRST'])
      await page.mouse.move(5, 500)
      await page.evaluate(`document.activeElement.blur()`)
      server.show(sceneOf({ alarms: floodOf(16) }))
      await expect.poll(ids).toEqual([1, 3, 16, 15, 14, 13, 12, 11, 10, 9, 8, 7, 6, 5, 4, 2])
      await page.context().close()
    },
  )

  // ALM-11
  it('says SOUND NOT AVAILABLE until the browser lets the page sound; three priorities are three signals; silence is no acknowledgement and ends with the next alarm; what is put aside is never heard', async () => {
    const med = inState(1, 'UNACK', { priority: 'medium' })
    const { page, faults } = await at(sceneOf({ alarms: [med] }), { init: standInForSound, width: 1920, height: 1080 })
    const strokes = () => page.evaluate(`window.strokes.map((s) => s.hz)`) as Promise<number[]>
    const clear = () => page.evaluate(`void (window.strokes.length = 0)`)
    expect(await page.textContent('#sound')).toBe('SOUND NOT AVAILABLE')
    expect(await strokes()).toEqual([])
    await page.keyboard.press('Tab')
    await until(page, `document.querySelector('#sound').textContent === 'SOUND ON'`)
    await expect.poll(async () => (await strokes()).slice(0, 2), { timeout: 6000 }).toEqual([660, 660])
    await page.click('#silence')
    await clear()
    expect(await page.textContent('#sound')).toBe('SILENCED until the next alarm')
    expect(await page.textContent('.al .soft')).toContain('1 not acknowledged')
    const put = (more: readonly ReturnType<typeof inState>[]) => server.show(sceneOf({ alarms: [med, ...more] }))
    put([
      inState(6, 'SHELVED', { priority: 'high' }),
      inState(7, 'SBD', { priority: 'high', active: true }),
      inState(8, 'OOS', { priority: 'high' }),
      inState(3, 'RTNUN', { priority: 'high' }),
    ])
    await until(page, `document.querySelector('.al').dataset.count === '5'`)
    expect([await strokes(), await page.textContent('#sound')]).toEqual([[], 'SILENCED until the next alarm'])
    put([inState(9, 'UNACK', { priority: 'high' })])
    await expect.poll(async () => (await strokes()).slice(0, 3)).toEqual([1040, 1040, 1040])
    server.show(sceneOf({ alarms: [inState(1, 'ACKED'), inState(9, 'ACKED', { priority: 'high' })] }))
    await until(page, `document.querySelector('.sound').dataset.sounding === 'nothing'`)
    await clear()
    await page.click('#test-sound')
    expect(await strokes()).toEqual([392, 660, 660, 1040, 1040, 1040])
    expect(faults).toEqual([])
    await page.context().close()
  })

  // ALM-11
  it('is heard on every page, and a server that falls silent calls as well', async () => {
    server.answer('/runs/1/alarm-performance', performanceOf())
    const high = inState(1, 'UNACK', { priority: 'high' })
    const { page } = await at(sceneOf({ alarms: [high] }), { hash: '#/alarms/1', init: standInForSound })
    await page.keyboard.press('Tab')
    const last = () => page.evaluate(`window.strokes.at(-1)?.hz`)
    await expect.poll(last, { timeout: 6000 }).toBe(1040)
    server.show(sceneOf({ alarms: [{ ...high, state: 'ACKED', needsAck: false }] }))
    await until(page, `document.querySelector('.sound').dataset.sounding === 'nothing'`)
    server.silence(true)
    await expect.poll(last, { timeout: 6000 }).toBe(660)
    server.silence(false)
    await until(page, `document.querySelector('.sound').dataset.sounding === 'nothing'`)
    await page.context().close()
  })

  it('a browser without Web Audio is told as silent for good, also after a touch', async () => {
    const { page, faults } = await at(sceneOf({ alarms: [alarmOf(1)] }), {
      init: () => Reflect.deleteProperty(window, 'AudioContext'),
    })
    await page.mouse.click(5, 400)
    await page.click('#test-sound')
    expect(await page.textContent('#sound')).toBe('SOUND NOT AVAILABLE')
    expect(await page.getAttribute('#sound', 'title')).toContain('seen, not heard')
    expect(faults).toEqual([])
    await page.context().close()
  })

  // DSP-02
  it('in grey and for a deuteranope, by day and night, every priority in every state looks different from every other', async () => {
    const alarms = [...everyState(['high', 'medium', 'low']), inState(25, 'ACKED')]
    const { page } = await at(sceneOf({ alarms }), { width: 1920, height: 3600 })
    await page.evaluate(`(() => {
      const svg = document.createElementNS('http://www.w3.org/2000/svg', 'svg')
      // Deuteranopia after Machado, Oliveira and Fernandes 2009, severity 1 (from memory).
      svg.innerHTML = '<filter id="deutan" color-interpolation-filters="linearRGB"><feColorMatrix values="0.367322 0.860646 -0.227968 0 0 0.280085 0.672501 0.047413 0 0 -0.011820 0.042940 0.968881 0 0 0 0 0 1 0"/></filter>'
      document.body.append(svg)
      // Every row begins on a whole pixel, so that only the look differs and not how it is smoothed.
      for (const li of document.querySelectorAll('.alarms > li')) Object.assign(li.style, { height: '130px', overflow: 'hidden', boxSizing: 'border-box' })
    })()`)
    const names = await page.locator('.alarms .mk').allTextContents()
    expect(names.length).toBe(25)
    const blank = await page.context().newPage()
    for (const theme of ['day', 'night'])
      for (const filter of ['grayscale(1)', 'url(#deutan)']) {
        await page.evaluate(
          `document.documentElement.dataset.theme = '${theme}'; document.querySelector('.alarms').style.filter = '${filter}'`,
        )
        // The strip may take another line in another theme.
        const boxes = await Promise.all((await page.locator('.alarms .mk').all()).map(async (m) => (await m.boundingBox())!))
        const png = (
          await page.screenshot({
            animations: 'disabled',
            clip: { x: Math.round(boxes[0]!.x) - 2, y: 0, width: 122, height: 3600 },
          })
        ).toString('base64')
        const apart = (await blank.evaluate(`(async (boxes, names) => {
          const bits = await createImageBitmap(await (await fetch('data:image/png;base64,${png}')).blob())
          const canvas = new OffscreenCanvas(bits.width, bits.height)
          const pen = canvas.getContext('2d', { willReadFrequently: true })
          pen.drawImage(bits, 0, 0)
          const linear = (v) => (v <= 10.3 ? v / 255 / 12.92 : ((v / 255 + 0.055) / 1.055) ** 2.4)
          const light = (d, at) => 0.2126 * linear(d[at]) + 0.7152 * linear(d[at + 1]) + 0.0722 * linear(d[at + 2]) + 0.05
          const pixels = boxes.map((b) => {
            const { data } = pen.getImageData(0, Math.round(b.y) - 2, 122, 58)
            return Float64Array.from({ length: data.length / 4 }, (_, i) => light(data, 4 * i))
          })
          const apart = []
          for (let i = 0; i < pixels.length; i++) for (let k = 0; k < i; k++) {
            let n = 0
            for (let at = 0; at < pixels[i].length; at++) {
              const ratio = pixels[i][at] / pixels[k][at]
              if (ratio > 1.5 || ratio < 1 / 1.5) n++
            }
            apart.push({ n, pair: names[i] + ' / ' + names[k] })
          }
          return apart.sort((a, b) => a.n - b.n)
        })(${JSON.stringify(boxes)}, ${JSON.stringify(names)})`)) as { n: number; pair: string }[]
        // The one that is there twice is the measure: the same look differs by nothing, the next most alike pair by more than a letter's stroke (30 pixels).
        const where = `${theme}, ${filter}: `
        expect([where, apart[0]]).toEqual([where, { n: 0, pair: 'MEDACK / MEDACK' }])
        expect(apart[1]!.n, where + apart[1]!.pair).toBeGreaterThan(60)
      }
    await page.context().close()
  })

  // ALM-13, USR-01
  it('the figures of the alarms: every row with target and value, short record said, lists beside; at four sizes nothing scrolls sideways and nothing is violated', async () => {
    server.answer('/runs/1/alarm-performance', performanceOf())
    const { page, faults } = await at(sceneOf({ alarms: [alarmOf(1)] }), { hash: '#/alarms/1', night: true })
    const cells = (await page.evaluate(
      `[...document.querySelectorAll('.alarm-table')[0].tBodies[0].rows].map((r) => [...r.cells].map((c) => c.textContent))`,
    )) as string[][]
    expect(cells.length).toBe(15)
    expect(cells.every((r) => r.length === 5 && r.every((c) => c !== ''))).toBe(true)
    expect(cells.find((r) => r[0]!.startsWith('Most alarms'))!.slice(1, 4)).toEqual(['at most 10', '14', 'not met'])
    expect(await page.textContent('main')).toContain('short record – not a conformance statement')
    expect(await page.textContent('main')).toContain('S1: Flow low')
    await page.fill('#period-from', '2031-01-14 02:00')
    await page.fill('#period-to', '2031-01-14 01:00')
    await page.click('button:has-text("Show this period")')
    expect(await page.textContent('.pick .refused')).toContain('put the earlier time into From')
    for (const [width, height, theme] of [
      [1024, 768, 'day'],
      [1920, 1080, 'day'],
      [3840, 2160, 'night'],
      [1366, 768, 'night'],
    ] as const) {
      await page.setViewportSize({ width, height })
      await page.evaluate(`document.documentElement.dataset.theme = '${theme}'`)
      expect(await page.evaluate(`document.documentElement.scrollWidth <= document.documentElement.clientWidth`)).toBe(true)
      expect(await violations(page)).toEqual([])
    }
    expect(faults).toEqual([])
    await page.context().close()
  })

  it('the hand-over note: everything that stands on one printed page, and a word for the next one that goes into the record', async () => {
    server.answer('/runs/1/hand-over', handOverNote())
    const { page, faults } = await at(sceneOf({ alarms: [alarmOf(1)] }), { hash: '#/handover/1' })
    for (const [width, height] of [
      [1024, 768],
      [3840, 2160],
      [1366, 768],
    ] as const) {
      await page.setViewportSize({ width, height })
      expect(await page.evaluate(`document.documentElement.scrollWidth <= document.documentElement.clientWidth`)).toBe(true)
    }
    const text = (await page.textContent('.sheet-note'))!
    for (const part of [
      'drum A-31 is nearly empty',
      'MEDIUM UNACK: S2 flow low',
      'until 03:21 (21 min left)',
      'low flow while the pump is stopped',
      'meter taken out',
      'S2: step F1 started',
      'Flush advised: S2: deposit is growing',
      'TT-022, frozen',
      'agreed at hand-over',
      'looked at the pump, no leak',
      '00:36 to 00:42, 6 min',
    ])
      expect(text).toContain(part)
    await page.click('button:has-text("Add to the note")')
    expect(await page.textContent('.ask .refused')).toContain('say what the next one must know')
    await page.fill('#note-words', 'filter F-2 is due at 06:00')
    await page.click('button:has-text("Add to the note")')
    await expect
      .poll(() => server.posted.at(-1))
      .toEqual({ kind: 'comment', alarm: null, text: 'Hand-over: filter F-2 is due at 06:00' })
    expect(await violations(page)).toEqual([])
    await page.emulateMedia({ media: 'print' })
    expect(
      await page.locator('.strip, .foot, .pick, .ask').evaluateAll((all) => all.map((e) => getComputedStyle(e).display)),
    ).toEqual(['none', 'none', 'none', 'none'])
    const pdf = (await page.pdf({ format: 'A4' })).toString('latin1')
    expect(pdf.match(/\/Type\s*\/Page[^s]/g)?.length).toBe(1)
    expect(faults).toEqual([])
    await page.context().close()
  })
})
