import { describe, expect, it } from 'vitest'
import type { Trail, TrailRow } from '../../server/wire/trail.ts'
import { served } from './served.ts'

const brief = (r: TrailRow) => [r.group, r.what, r.about, r.person, r.old, r.new, r.reason]

// REC-02, REC-03
describe('the trail of a run', () => {
  it('tells acts, changes with old and new, shelving, refused requests and sign-ins, each with person, reason and both times', async () => {
    const s = await served({ demo: false })
    await s.live(90)
    const engineer = await s.as('engineer')
    const act = async (body: object) => (await s.post('/api/runs/1/acts', body, engineer)).status
    expect(await act({ kind: 'comment', alarm: null, text: 'sample 12 drawn' })).toBe(200)
    expect(await act({ kind: 'limit', segment: 'R1', limit: 'dpHighBar', value: 5.5, reason: 'trial of a lower limit' })).toBe(200)
    expect(await act({ kind: 'limit', segment: 'R1', limit: 'dpHighBar', value: null, reason: 'not needed tonight' })).toBe(200)
    expect(await act({ kind: 'acknowledge', alarm: 9999 })).toBe(200)
    const trail = (await s.get('/api/runs/1/trail?groups=act,change,refused,access', engineer)).json() as Trail
    const rows = trail.rows.map(brief)
    expect(rows).toContainEqual(['act', 'comment', null, 'Person b', null, null, 'sample 12 drawn'])
    expect(rows).toContainEqual(['change', 'limit', 'R1 dpHighBar', 'Person b', '6', '5.5', 'trial of a lower limit'])
    expect(rows).toContainEqual(['change', 'limit', 'R1 dpHighBar', 'Person b', '5.5', 'none', 'not needed tonight'])
    const refused = trail.rows.filter((r) => r.group === 'refused')
    expect(refused.map((r) => [r.what, r.person, r.old, r.new])).toEqual([['acknowledge', 'Person b', null, null]])
    expect(refused[0]!.reason).toContain('9999')
    expect(trail.rows.some((r) => r.group === 'access' && r.chain === 'site')).toBe(true)
    expect(trail.people).toContain('Person b')
    for (const r of trail.rows) expect(r.recordedMs).toBeGreaterThan(0)
    const times = trail.rows.map((r) => r.recordedMs)
    expect(times).toEqual([...times].sort((a, b) => a - b))
    const comment = trail.rows.find((r) => r.what === 'comment')!
    expect(comment.tMs).toBe(s.monitor.clock(1).nowMs)
  })

  it('gives pages and filters: by person, group, time of recording, and what is new; counts and head stand whatever the filter', async () => {
    const s = await served()
    await s.live(2)
    for (let i = 0; i < 7; i++) await s.post('/api/runs/1/acts', { kind: 'comment', alarm: null, text: `note ${i}` })
    const get = async (query: string) => (await s.get(`/api/runs/1/trail?${query}`)).json() as Trail
    const all = await get('groups=act')
    expect([all.total, all.rows.length]).toEqual([7, 7])
    const page = await get('groups=act&from=2&limit=3')
    expect([page.total, page.from, page.rows]).toEqual([7, 2, all.rows.slice(2, 5)])
    expect((await get('person=nobody')).total).toBe(0)
    expect((await get(`groups=act&fromMs=${all.rows[0]!.recordedMs}&toMs=${all.rows.at(-1)!.recordedMs + 1}`)).total).toBe(7)
    expect((await get(`toMs=${all.rows[0]!.recordedMs - 60_000}`)).total).toBe(0)
    expect((await get('onlyNew=true&groups=act')).total).toBe(7)
    expect([page.counts, page.head]).toEqual([all.counts, s.store.trail.head(1).head])
    expect(page.counts.run).toBe(s.store.trail.ofRun(1).length)
    expect((await s.get('/api/runs/99/trail')).status).toBe(404)
    expect((await s.get('/api/runs/1/trail?limit=501')).status).toBe(400)
  })

  it('is reviewed by a reviewer alone, up to what was shown; what came later stands out, and the review is a record with its meaning', async () => {
    const s = await served({ demo: false })
    await s.live(2)
    const operator = await s.as('operator')
    const reviewer = await s.as('reviewer')
    const say = (text: string) => s.post('/api/runs/1/acts', { kind: 'comment', alarm: null, text }, operator)
    const trail = async () => (await s.get('/api/runs/1/trail', reviewer)).json() as Trail
    await say('before')
    const seen = await trail()
    expect([seen.review, seen.fresh]).toEqual([null, seen.rows.length])
    await say('after')
    const body = { run: 1, counts: seen.counts, remark: 'nothing to remark' }
    expect((await s.post('/api/trail/reviews', body, operator)).status).toBe(403)
    const reply = await s.post('/api/trail/reviews', body, reviewer)
    expect([reply.status, (reply.json() as Trail).review]).toEqual([
      200,
      { person: expect.stringMatching(/^Person/), atMs: s.wall.now(), remark: 'nothing to remark', counts: seen.counts },
    ])
    const now = await trail()
    expect(now.rows.filter((r) => r.isNew).map((r) => [r.what, r.reason])).toEqual([['comment', 'after']])
    expect(now.fresh).toBe(1)
    const entry = s.store.audit.list().at(-1)!
    expect(entry).toMatchObject({
      act: 'trail.reviewed',
      run: 1,
      old: null,
      body: { meaning: 'review of the audit trail', counts: seen.counts },
    })
    expect((entry.new as { run: string }).run).toBe(s.store.trail.hashAt(1, seen.counts.run - 1))
    // Never back behind a review, never beyond what there is.
    for (const run of [seen.counts.run - 1, now.counts.run + 1])
      expect((await s.post('/api/trail/reviews', { ...body, counts: { ...now.counts, run } }, reviewer)).status).toBe(409)
    const again = await s.post('/api/trail/reviews', { run: 1, counts: now.counts, remark: '' }, reviewer)
    expect((again.json() as Trail).fresh).toBe(0)
    expect(s.store.trail.verify().faults).toEqual([])
  })
})

describe('the trail of the site', () => {
  it('tells people, runs and reviews, and is reviewed for itself', async () => {
    const s = await served({ demo: false })
    const reviewer = await s.as('reviewer')
    const trail = async () => (await s.get('/api/trail', reviewer)).json() as Trail
    const seen = await trail()
    expect(seen.rows.map((r) => r.what)).toEqual(expect.arrayContaining(['run.begun', 'person.add']))
    expect([seen.run, seen.counts.run, seen.signing]).toEqual([
      null,
      0,
      { fingerprint: null, trouble: expect.stringContaining('not signed') },
    ])
    expect((await s.post('/api/trail/reviews', { run: null, counts: seen.counts, remark: '' }, reviewer)).status).toBe(200)
    const now = await trail()
    expect([now.fresh, now.review?.counts]).toEqual([0, seen.counts])
    expect(now.rows.at(-1)).toMatchObject({ group: 'review', what: 'trail.reviewed', isNew: false })
  })
})
