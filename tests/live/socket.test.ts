import { connect } from 'node:net'
import { describe, expect, it } from 'vitest'
import type { Delta, LiveState, Snapshot, StepPoint } from '../../server/wire/index.ts'
import { type Served, served } from '../http/served.ts'
import { openPage } from './page.ts'

async function listening(more: Parameters<typeof served>[0] = {}): Promise<Served & { port: number }> {
  const s = await served(more)
  await s.app.listen({ host: '127.0.0.1', port: 0 })
  return { ...s, port: (s.app.server.address() as { port: number }).port }
}
const all = ['state', 'steps', 'readings', 'alarms', 'acts'] as const

/** The state a page holds after a snapshot and deltas. */
const merged = (snapshot: Snapshot, deltas: readonly Delta[]): LiveState =>
  Object.assign({}, snapshot.state, ...deltas.map((d) => d.state))

describe('the websocket', () => {
  it('greets, gives a snapshot, then deltas without a hole whose merge is the state the server holds', async () => {
    const s = await listening()
    await s.live(3)
    const page = await openPage(s.port)
    const snapshot = page.next('snapshot')
    page.send({ type: 'subscribe', run: s.run, topics: all, sinceMs: null })
    const first = await snapshot
    const last = page.next('delta', (d) => d.seq === first.seq + 30)
    await s.live(29)
    s.monitor.act(s.run, { kind: 'comment', person: 'demo operator', alarm: null, text: 'checked the drum' })
    await last
    const deltas = page.of('delta')
    expect(deltas.map((d) => d.seq)).toEqual(Array.from({ length: 30 }, (_, i) => first.seq + 1 + i))
    const { clock: _, data: __, ...held } = merged(first, deltas)
    const { clock: ___, data: ____, ...now } = s.monitor.state(s.run)
    expect(held).toEqual(now)
    expect(deltas.flatMap((d) => d.steps ?? []).length).toBeGreaterThan(55)
    expect(deltas.flatMap((d) => d.alarms ?? []).map((a) => a.kind)).toContain('fouling')
    expect(deltas.flatMap((d) => d.acts ?? []).map((a) => a.act)).toMatchObject([{ kind: 'comment', text: 'checked the drum' }])
    // Alarms and advice, the large parts, travel only when they change.
    expect(deltas.filter((d) => d.state?.alarms !== undefined).length).toBeLessThan(6)
    expect(page.of('hello')[0]).toMatchObject({ api: 1, version: '9.9.9' })
  })

  it('fills the gap of a page that was cut off: steps before, in the snapshot and after are those of an undisturbed page', async () => {
    const s = await listening()
    const steady = await openPage(s.port)
    const ready = steady.next('snapshot')
    steady.send({ type: 'subscribe', run: s.run, topics: all, sinceMs: 0 })
    await ready
    const cut = await openPage(s.port)
    const begun = cut.next('snapshot')
    cut.send({ type: 'subscribe', run: s.run, topics: all, sinceMs: 0 })
    await begun
    const before = cut.next('delta', (d) => d.seq === 5)
    await s.live(5)
    await before
    const lastStep = cut
      .of('delta')
      .flatMap((d) => d.steps ?? [])
      .at(-1)!.tMs
    cut.socket.terminate()
    await s.live(7)
    const back = await openPage(s.port)
    const filled = back.next('snapshot')
    back.send({ type: 'subscribe', run: s.run, topics: all, sinceMs: lastStep })
    const snapshot = await filled
    const end = back.next('delta', (d) => d.seq === snapshot.seq + 4)
    const steadyEnd = steady.next('delta', (d) => d.seq === 16)
    await s.live(4)
    await Promise.all([end, steadyEnd])
    const stepsOf = (deltas: readonly Delta[]): StepPoint[] => deltas.flatMap((d) => d.steps ?? [])
    const pieced = [...stepsOf(cut.of('delta')), ...snapshot.steps, ...stepsOf(back.of('delta'))]
    expect(pieced.length).toBeGreaterThan(25)
    expect(pieced).toEqual(stepsOf(steady.of('delta')))
    expect(snapshot.readings.length).toBeGreaterThan(100)
    expect(snapshot.moreFromMs).toBeNull()
  })

  it('beats each interval with the clock of every live run, also when nothing is new', async () => {
    const s = await listening({ heartbeatMs: 20 })
    await s.live(1)
    const page = await openPage(s.port)
    await page.next('heartbeat')
    const beat = await page.next('heartbeat')
    expect(beat.runs).toEqual([
      { run: s.run, clock: s.monitor.lives()[0]!.source.clock(), lastRowMs: Date.UTC(2031, 4, 5, 18) + 59_000 },
    ])
  })

  it('drops deltas of a page that reads nothing, holds a bounded queue for it, and gives it a snapshot once it reads again', async () => {
    const s = await listening({ heartbeatMs: 10 })
    await s.live(1)
    const page = await openPage(s.port)
    const ready = page.next('snapshot')
    page.send({ type: 'subscribe', run: s.run, topics: all, sinceMs: null })
    const first = await ready
    page.socket.pause()
    // Each act is a delta; the text makes it large, so that the buffers of the system fill too.
    const text = 'x'.repeat(60_000)
    let sent = 0
    for (; sent < 400; sent++) s.monitor.act(s.run, { kind: 'comment', person: 'demo operator', alarm: null, text })
    const back = page.next('snapshot')
    const got = page.of('delta').length
    page.socket.resume()
    const again = await back
    const deltas = page.of('delta').filter((d) => d.seq <= again.seq)
    expect(got).toBeLessThan(sent)
    expect(deltas.length).toBeLessThan(sent)
    expect(again.seq).toBe(first.seq + deltas.length)
    const next = page.next('delta')
    s.monitor.act(s.run, { kind: 'comment', person: 'demo operator', alarm: null, text: 'after' })
    expect((await next).seq).toBe(again.seq + 1)
  })

  it.each([
    ['a foreign Host', { host: 'rebound.example' }],
    ['a foreign Origin', { origin: 'http://rebound.example' }],
  ])('refuses an upgrade from %s', async (_, headers) => {
    const s = await listening()
    await expect(openPage(s.port, headers)).rejects.toThrow('403')
  })

  it('answers nonsense with what was expected and stays open; too large a frame ends the connection', async () => {
    const s = await listening()
    const page = await openPage(s.port)
    for (const [text, says] of [
      ['{', 'JSON'],
      ['null', 'subscribe'],
      ['{"type":"subscribe","run":1,"topics":["everything"],"sinceMs":null}', 'topics'],
      ['{"type":"subscribe","run":"1","topics":[],"sinceMs":null}', 'run'],
      ['{"type":"subscribe","run":77,"topics":[],"sinceMs":null}', 'not live'],
    ] as const) {
      const error = page.next('error')
      page.send(text)
      expect((await error).problem.message).toContain(says)
    }
    const closed = page.closed()
    page.send('x'.repeat(20_000))
    expect(await closed).toBe(1009)
  })

  it('says goodbye with 1001 when the server closes, and survives a peer that vanishes in the middle of an upgrade', async () => {
    const s = await listening()
    const rude = connect(s.port, '127.0.0.1')
    rude.write('GET /ws HTTP/1.1\r\nHost: 127.0.0.1\r\nUpgrade: websocket\r\nConnection: Upgrade\r\n')
    rude.destroy()
    const page = await openPage(s.port)
    const closed = page.closed()
    await s.app.close()
    expect(await closed).toBe(1001)
  })
})
