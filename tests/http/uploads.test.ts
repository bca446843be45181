import { describe, expect, it } from 'vitest'
import { demoScenario } from '../../server/core/sim/demo.ts'
import { logText } from '../../server/core/sim/log-text.ts'
import type { LiveState, RunRow, Trends } from '../../server/wire/index.ts'
import { heron, heronText, shortNight } from '../monitor/bench.ts'
import { local, type Served, served } from './served.ts'

const begin = {
  title: 'last night',
  skid: { name: 'heron.yaml', text: heronText },
  events: null,
  start: null,
}
const put = (s: Served, upload: string, name: string, payload: string | Buffer, type = 'application/octet-stream') =>
  s.app.inject({ method: 'PUT', url: `/api/uploads/${upload}/logs/${name}`, headers: { ...local, 'content-type': type }, payload })
const log = (hours: number): string => [...logText(heron, { ...demoScenario(heron), ...shortNight(hours) }).lines()].join('')

describe('an upload', () => {
  it('becomes a run of its own beside the live one, with alarms, trends and a state at any moment', async () => {
    const s = await served()
    await s.live(1)
    const text = log(0.6)
    const { upload } = (await s.post('/api/uploads', begin)).json()
    const half = text.indexOf('\n', text.length / 2) + 1
    const header = text.slice(0, text.indexOf('\n') + 1)
    expect((await put(s, upload, 'part-1.csv', text.slice(0, half))).json().logs).toEqual([{ name: 'part-1.csv', bytes: half }])
    expect((await put(s, upload, 'part-2.csv', header + text.slice(half), 'text/csv')).statusCode).toBe(200)
    const row = (await s.post(`/api/uploads/${upload}/import`, {})).json() as RunRow
    expect([row.state, row.kind, row.title, row.clock]).toEqual(['importing', 'uploaded', 'last night', null])
    await s.imports.idle()
    const rows = (await s.get('/api/runs')).json() as RunRow[]
    expect(rows.map((r) => [r.run, r.state, r.rows])).toEqual([
      [row.run, 'ended', 2160],
      [s.run, 'live', 60],
    ])
    expect(rows[0]!.alarms).toMatchObject({ medium: 1 })
    expect(rows[0]!.fouling?.segment).toBe('R1')
    const state = (await s.get(`/api/runs/${row.run}/state`)).json() as LiveState
    expect(state.alarms.map((a) => a.key)).toEqual(['fouling:R1'])
    expect(state.data.source.state).toBe('ended')
    const trends = (await s.get(`/api/runs/${row.run}/trends?tags=TT-112`)).json() as Trends
    expect(trends.tags[0]!.mean.filter((v) => v !== null).length).toBeGreaterThan(300)
    const again = await s.post(`/api/uploads/${upload}/import`, {})
    expect([again.status, again.json().code]).toEqual([400, 'UPLOAD'])
  })

  it('may take the skid file of a run in the store', async () => {
    const s = await served()
    await s.live(1)
    const { upload } = (await s.post('/api/uploads', { ...begin, skid: { ofRun: s.run } })).json()
    await put(s, upload, 'a.csv', log(0.05))
    const row = (await s.post(`/api/uploads/${upload}/import`, {})).json() as RunRow
    await s.imports.idle()
    expect((await s.get(`/api/runs/${row.run}`)).json()).toMatchObject({ skid: 'heron', state: 'ended', rows: 180 })
  })

  it.each([
    ['a skid file with a mistake', 422, 'SKID_FILE', { ...begin, skid: { name: 'x.yaml', text: 'skid: heron\ntagz: []\n' } }],
    ['a title that is no text', 400, 'HTTP_400', { ...begin, title: 5 }],
    ['a field too many', 400, 'HTTP_400', { ...begin, path: '/etc' }],
    ['a run that never was', 404, 'RUN_UNKNOWN', { ...begin, skid: { ofRun: 77 } }],
  ])('answers %s with %i %s', async (_, status, code, body) => {
    const s = await served()
    const reply = await s.post('/api/uploads', body)
    expect([reply.status, reply.json().code]).toEqual([status, code])
  })

  it('tells the place of a mistake in the skid file', async () => {
    const s = await served()
    const reply = await s.post('/api/uploads', { ...begin, skid: { name: 'x.yaml', text: 'skid: heron\ntagz: []\n' } })
    expect(reply.json().place).toMatchObject({ file: 'x.yaml', line: expect.any(Number) })
  })

  it('stops at the limit of the server with 413, keeps nothing of it, and takes a smaller file afterwards', async () => {
    const s = await served({ uploadMaxBytes: 100_000 })
    const { upload } = (await s.post('/api/uploads', begin)).json()
    expect((await put(s, upload, 'big.csv', Buffer.alloc(100_001, 'x'))).statusCode).toBe(413)
    const chunked = await s.app.inject({
      method: 'PUT',
      url: `/api/uploads/${upload}/logs/big.csv`,
      headers: { ...local, 'content-type': 'text/csv', 'transfer-encoding': 'chunked' },
      payload: (await import('node:stream')).Readable.from(Array.from({ length: 20 }, () => Buffer.alloc(10_000, 'y'))),
    })
    expect(chunked.statusCode).toBe(413)
    expect((await put(s, upload, 'small.csv', log(0.01))).json().logs.map((l: { name: string }) => l.name)).toEqual(['small.csv'])
  })

  it('a log that is none ends as a failed run that says what was wrong and where; the live run goes on', async () => {
    const s = await served()
    const { upload } = (await s.post('/api/uploads', begin)).json()
    await put(s, upload, 'holiday.csv', 'name,when\nfirst,tomorrow\n')
    const row = (await s.post(`/api/uploads/${upload}/import`, {})).json() as RunRow
    await s.imports.idle()
    const after = (await s.get(`/api/runs/${row.run}`)).json() as RunRow
    expect(after.state).toBe('failed')
    expect(after.fault).toMatch(/^holiday\.csv:1/)
    await s.live(2)
    expect(s.monitor.state(s.run).data.source.state).toBe('running')
  })

  it('names of logs are names only: no path leads out of the upload', async () => {
    const s = await served()
    const { upload } = (await s.post('/api/uploads', begin)).json()
    const reply = await put(s, upload, encodeURIComponent('../../outside.csv'), log(0.01))
    expect(reply.statusCode).toBe(200)
    expect(reply.json().logs[0].name).toBe('../../outside.csv')
    const { existsSync } = await import('node:fs')
    const { tmpdir } = await import('node:os')
    const { join } = await import('node:path')
    expect(existsSync(join(tmpdir(), 'outside.csv'))).toBe(false)
  })
})
