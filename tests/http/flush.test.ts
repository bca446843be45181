import { expect, it } from 'vitest'
import type { Report } from '../../server/core/report.ts'
import * as schemas from '../../server/http/schemas.ts'
import type { FlushDetail, LiveState } from '../../server/wire/index.ts'
import { holds } from './holds.ts'
import { served } from './served.ts'

it('over HTTP a flush opens with F0, water before its time is refused and on record, an abort ends it; state, past state and report say so', async () => {
  const s = await served()
  await s.live(40)
  const url = `/api/runs/${s.run}`
  const json = async <T>(path: string): Promise<T> => (await s.get(path)).json() as T
  const step = async (id: string, state: string, reason = '') =>
    (await s.post(`${url}/acts`, { kind: 'flush-step', segment: 'R1', step: id, state, reason })).status
  expect(await json<FlushDetail>(`${url}/flush`)).toEqual({ course: null, plan: null })
  expect(await step('F0', 'started')).toBe(200)
  await s.live(3)
  expect(await step('F3', 'started')).toBe(200)
  const { course, plan } = await json<FlushDetail>(`${url}/flush`)
  expect(plan!.steps.map((x) => x.id)).toEqual(['F0', 'F1', 'F2', 'F3', 'F4', 'F5', 'F6'])
  expect(course!.refusals.map((r) => [r.step, r.person, r.reasons[0]])).toEqual([
    ['F3', 'demo operator', 'no water before F1 is accepted'],
  ])
  // The simulated operator has stopped the feeds: readings say so, a person has not yet looked.
  expect(course!.steps[0]!.points.filter((p) => p.by === 'readings').map((p) => p.state)).toEqual(['met', 'met', 'met', 'met'])
  expect(course!.steps[0]!.points.filter((p) => p.by === 'person').map((p) => p.state)).toEqual(['not-yet', 'not-yet'])
  const check = {
    kind: 'flush-check',
    segment: 'R1',
    step: 'F0',
    criterion: 'outlet-diverted',
    verdict: 'met',
    value: 'in V-02',
    source: 'at the valve',
    reason: '',
  }
  expect((await s.post(`${url}/acts`, check)).status).toBe(200)
  expect((await s.post(`${url}/acts`, { ...check, verdict: 'perhaps' })).status).toBe(400)
  expect(await step('F0', 'aborted')).toBe(200)
  const state = await json<LiveState>(`${url}/state`)
  holds(schemas.liveStateSchema, state)
  expect(state.flush).toMatchObject({ state: 'aborted', endedBy: 'demo operator' })
  const then = await json<LiveState>(`${url}/state?atMs=${course!.openedMs}`)
  expect(then.flush).toMatchObject({ state: 'running', refusals: [] })
  expect((await json<Report>(`${url}/report`)).flushes[0]).toMatchObject({ flush: 1, state: 'aborted', segments: ['R1'] })
})
