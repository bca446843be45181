import { describe, expect, it } from 'vitest'
import { served } from './served.ts'

describe('downloads of a live run', () => {
  it('hands out alarms by filter with their facts, readings and record, as attachments that no cache keeps', async () => {
    const s = await served()
    await s.live(35)
    s.monitor.act(s.run, { kind: 'acknowledge', person: 'demo operator', alarm: 1 })
    s.monitor.act(s.run, { kind: 'shelve', person: 'demo operator', alarm: 1, minutes: 5, reason: 'no' })
    const base = `/api/runs/${s.run}/export`
    const csv = await s.get(`${base}/alarms.csv`)
    expect(csv.headers['content-disposition']).toBe('attachment; filename="clearbore-heron-run1-alarms.csv"')
    expect([csv.headers['content-type'], csv.headers['cache-control']]).toEqual(['text/csv; charset=utf-8', 'no-store'])
    const lines = csv.text.trimEnd().split('\r\n')
    expect(lines.length).toBe(4)
    // Who, what and why, refusals too (ALM-10).
    expect(lines[2]).toMatch(/,UNACK,ACKED,ack,moved,.*,demo operator,/)
    expect(lines[3]).toMatch(/,shv,refused,.*,demo operator,,a reason of at least 5 characters is required/)
    const json = (await s.get(`${base}/alarms.json?priority=medium&segment=R1`)).json()
    expect(json).toMatchObject({
      export: 'alarms',
      rows: 3,
      filter: { priority: 'medium', segment: 'R1', kind: null },
      tool: { version: '9.9.9' },
      recordedWith: 'test',
    })
    expect(json.cautions).toHaveLength(3)
    expect(json.alarms).toMatchObject([{ id: 1, acknowledgedBy: 'demo operator' }])
    expect((await s.get(`${base}/alarms.json?kind=exotherm`)).json()).toMatchObject({ rows: 0, alarms: [], history: [] })
    const late = Date.UTC(2031, 4, 5, 18, 34)
    expect((await s.get(`${base}/alarms.json?fromMs=${late}`)).json()).toMatchObject({ rows: 2, from: '2031-05-05T18:34:00.000Z' })
    expect((await s.get(`${base}/samples.csv`)).text.split('\n').length).toBe(2100 + 2)
    const record = (await s.get(`${base}/record.json`)).json()
    expect(record.sequence.reduce((n: number, e: { rows?: unknown[] }) => n + (e.rows?.length ?? 1), 0)).toBe(2102)
    expect(record.transitions.map((t: { input: string }) => t.input)).toEqual(['act', 'ack', 'shv'])
    expect((await s.get(`${base}/samples.json`)).status).toBe(404)
    expect((await s.get(`${base}/alarms.csv?colour=red`)).status).toBe(400)
    for (const time of ['Infinity', '1e300', '-8640000000000001'])
      expect((await s.get(`${base}/alarms.json?toMs=${time}`)).status).toBe(400)
    expect((await s.get('/api/runs/77/export/alarms.csv')).status).toBe(404)
  })
})
