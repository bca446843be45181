import { Type } from 'typebox'
import { describe, expect, it } from 'vitest'
import * as schemas from '../../server/http/schemas.ts'
import type { AlarmRow, LiveState, Trends } from '../../server/wire/index.ts'
import { holds } from './holds.ts'
import { served } from './served.ts'

describe('a live run over HTTP', () => {
  it('tells after 40 min of the demo of a deposit in R1 that began at 25 min, each reply as its schema has it, and of the past only what was known then', async () => {
    const s = await served()
    await s.live(40)
    const url = `/api/runs/${s.run}`
    const json = async (path: string) => {
      const reply = await s.get(path)
      expect(reply.status, path).toBe(200)
      return reply.json()
    }
    holds(schemas.serviceSchema, await json('/api/service'))
    holds(Type.Array(schemas.runRowSchema), await json('/api/runs'))
    holds(schemas.runDetailSchema, await json(url))
    const state = (await json(`${url}/state`)) as LiveState
    holds(schemas.liveStateSchema, state)
    const r1 = state.segments.find((g) => g.segment === 'R1')!
    expect(r1.standing).toMatchObject({ priority: 'medium', needsAck: true })
    expect(r1.ratio! * r1.cleanDpBar!).toBeCloseTo(r1.dpBar!, 9)
    const began = Date.UTC(2031, 4, 5, 18, 25)
    expect(r1.onset!.lowMs).toBeLessThanOrEqual(began)
    expect(r1.onset!.highMs).toBeGreaterThanOrEqual(began - 60_000)
    expect(state.comb.received).toEqual(new Array(30).fill(true))
    holds(schemas.reportSchema, await json(`${url}/report`))
    holds(schemas.marksSchema, await json(`${url}/marks`))
    holds(Type.Array(schemas.alarmRowSchema), await json(`${url}/alarms`))
    holds(Type.Array(schemas.transitionRowSchema), await json(`${url}/transitions`))
    const trends = (await json(`${url}/trends?buckets=40&tags=TT-112,PT-111`)) as Trends
    holds(schemas.trendsSchema, trends)
    expect([trends.tags.map((t) => [t.tag, t.unit]), trends.buckets]).toEqual([
      [
        ['TT-112', 'degC'],
        ['PT-111', 'bar'],
      ],
      40,
    ])
    const last = trends.segments.find((g) => g.segment === 'R1')!.ratio.mean.findLast((v) => v !== null)
    expect(last).toBeGreaterThan(1.005)
    const plan = (await json(`${url}/flush-plan?segment=R1`)) as { steps: unknown[]; cautions: string[] }
    holds(schemas.flushPlanSchema, plan)
    expect(plan.steps.length).toBeGreaterThan(3)
    expect(plan.cautions.join(' ')).toContain('dvisory')

    // A moment of the past as it was known then: no alarm before it was raised, no onset before it was found.
    const at = Date.UTC(2031, 4, 5, 18, 20)
    const then = (await s.get(`/api/runs/${s.run}/state?atMs=${at}`)).json() as LiveState
    holds(schemas.liveStateSchema, then)
    expect([then.alarms, then.advice, then.segments.map((g) => g.onset)]).toEqual([[], [], new Array(6).fill(null)])
    expect(then.mode).toMatchObject({ production: true, phase: 'production' })
    const alarm = ((await s.get(`/api/runs/${s.run}/alarms`)).json() as AlarmRow[])[0]!
    const after = (await s.get(`/api/runs/${s.run}/state?atMs=${alarm.raisedMs + 5000}`)).json() as LiveState
    expect(after.alarms.map((a) => [a.id, a.state])).toEqual([[alarm.id, 'UNACK']])
    const live = (await s.get(`/api/runs/${s.run}/state`)).json() as LiveState
    const same = (await s.get(`/api/runs/${s.run}/state?atMs=${live.data.lastRowMs}`)).json() as LiveState
    const growth = (state: LiveState) =>
      state.segments.map(({ segment, ratio, dpBar, onset, forecast, baseline, limits }) => ({
        segment,
        ratio,
        dpBar,
        onset,
        forecast,
        baseline,
        limits,
      }))
    expect(growth(same)).toEqual(growth(live))
  })

  it('keeps a gap a gap: a bucket without a reading is null, never 0', async () => {
    const s = await served()
    await s.live(2)
    const from = Date.UTC(2031, 4, 5, 18) - 600_000
    const { json } = await s.get(`/api/runs/${s.run}/trends?fromMs=${from}&toMs=${from + 700_000}&buckets=20&tags=PT-111`)
    const { tags, segments, production } = json() as Trends
    expect(tags[0]!.mean.slice(0, 10)).toEqual(new Array(10).fill(null))
    expect(segments[0]!.ratio.mean.slice(0, 10)).toEqual(new Array(10).fill(null))
    expect(production.slice(0, 10)).toEqual(new Array(10).fill(null))
    expect(tags[0]!.mean.at(-2)).toBeGreaterThan(5)
  })
})

describe('acts over HTTP', () => {
  it('acknowledges with a name and a time, shows it in alarms and journal, and refuses a second time to no effect', async () => {
    const s = await served()
    await s.live(35)
    const alarm = ((await s.get(`/api/runs/${s.run}/alarms`)).json() as AlarmRow[])[0]!
    const url = `/api/runs/${s.run}/acts`
    const body = { kind: 'acknowledge', alarm: alarm.id }
    const reply = await s.post(url, body)
    expect(reply.status).toBe(200)
    holds(schemas.actReplySchema, reply.json())
    expect(reply.json().transitions).toMatchObject([
      { from: 'UNACK', to: 'ACKED', input: 'ack', outcome: 'moved', person: 'demo operator' },
    ])
    const after = ((await s.get(`/api/runs/${s.run}/alarms`)).json() as AlarmRow[])[0]!
    expect(after).toMatchObject({ state: 'ACKED', acknowledgedBy: 'demo operator', needsAck: false, active: true })
    expect(s.store.sequence.acts(s.run).map((a) => a.act)).toMatchObject([{ ...body, person: 'demo operator' }])
    expect((await s.post(url, body)).json().transitions.filter((t: { outcome: string }) => t.outcome === 'moved')).toEqual([])
    expect((await s.get(`/api/runs/${s.run}`)).json().alarms.unacknowledged).toBe(0)
  })

  it('puts a changed limit in force at once, with who and why', async () => {
    const s = await served()
    await s.live(3)
    const act = {
      kind: 'limit',
      segment: 'R1',
      limit: 'dpHighBar',
      value: 5.5,
      reason: 'weaker gasket',
    }
    expect((await s.post(`/api/runs/${s.run}/acts`, act)).status).toBe(200)
    const state = (await s.get(`/api/runs/${s.run}/state`)).json() as LiveState
    expect(state.segments.find((g) => g.segment === 'R1')!.limits.dpHighBar).toBe(5.5)
    const marks = (await s.get(`/api/runs/${s.run}/marks`)).json()
    expect(marks.limits.at(-1)).toMatchObject({
      segment: 'R1',
      limit: 'dpHighBar',
      value: 5.5,
      person: 'demo operator',
      reason: 'weaker gasket',
    })
  })

  it.each([
    ['a person of the sender’s choice', { kind: 'comment', alarm: null, text: 'seen', person: 'A' }, 'additional properties'],
    ['a number as text', { kind: 'acknowledge', alarm: '1' }, 'alarm must be integer'],
    ['an unknown field', { kind: 'acknowledge', alarm: 1, force: true }, 'additional properties'],
    ['an unknown act', { kind: 'open-valve' }, 'kind'],
    ['a limit without a reason', { kind: 'limit', segment: 'R1', limit: 'dpHighBar', value: 5, reason: '' }, 'reason'],
    ['an unknown limit', { kind: 'limit', segment: 'R1', limit: 'dpHigh', value: 5, reason: 'because' }, 'limit'],
  ])('answers %s with 400 and what is wrong, and does nothing', async (_, body, says) => {
    const s = await served()
    await s.live(1)
    const reply = await s.post(`/api/runs/${s.run}/acts`, body)
    expect(reply.status).toBe(400)
    holds(schemas.problemSchema, reply.json())
    expect(reply.json().message).toContain(says)
    expect(s.store.sequence.acts(s.run)).toEqual([])
  })

  it('answers 409 once the run has ended, 404 for a run that never was', async () => {
    const s = await served()
    await s.live(1)
    await s.monitor.end(s.run)
    const body = { kind: 'acknowledge', alarm: 1 }
    const ended = await s.post(`/api/runs/${s.run}/acts`, body)
    expect([ended.status, ended.json().code]).toEqual([409, 'RUN_ENDED'])
    const never = await s.post('/api/runs/99/acts', body)
    expect([never.status, never.json().code]).toEqual([404, 'RUN_UNKNOWN'])
    const steps = await s.get(`/api/runs/${s.stepsRun}`)
    expect(steps.status).toBe(404)
  })
})
