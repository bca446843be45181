import { Value } from 'typebox/value'
import { describe, expect, it } from 'vitest'
import { handOverSchema, performanceSchema, storySchema } from '../../server/http/alarm-schemas.ts'
import type { AlarmPerformance, AlarmRow, AlarmStory, HandOver } from '../../server/wire/index.ts'
import { served } from './served.ts'

const hour = 3_600_000

describe('alarm performance, what led to an alarm, hand-over', () => {
  it('of a night with fouling: figures of any period, first-out with the half hour before, a note that gives the same again', async () => {
    const s = await served()
    await s.live(150)
    const alarms = (await s.get(`/api/runs/${s.run}/alarms`)).json() as AlarmRow[]
    const alarm = alarms.find((a) => a.kind === 'fouling')!
    const person = 'demo operator'
    const act = async (body: object) => (await s.post(`/api/runs/${s.run}/acts`, body)).status
    expect(await act({ kind: 'acknowledge', alarm: alarm.id })).toBe(200)
    expect(await act({ kind: 'comment', alarm: null, text: 'Hand-over: drum A-31 is nearly empty' })).toBe(200)
    expect(await act({ kind: 'limit', segment: 'R1', limit: 'dpHighBar', value: 5, reason: 'agreed at hand-over' })).toBe(200)
    await s.live(1)

    // ALM-13
    const get = async <T>(path: string): Promise<T> => (await s.get(`/api/runs/${s.run}/${path}`)).json() as T
    const all = await get<AlarmPerformance>('alarm-performance')
    expect(Value.Check(performanceSchema, all)).toBe(true)
    expect(all.label).toBe('short record – not a conformance statement')
    const journal = (await get<{ sound: boolean; tMs: number }[]>('transitions')).filter((t) => t.sound)
    expect(all.annunciated).toBe(journal.length)
    expect(all.table.find((r) => r.metric.includes('setpoint'))!.basis).toContain('0 of 1 setpoint change')
    const half = await get<AlarmPerformance>(`alarm-performance?fromMs=${all.fromMs}&toMs=${all.fromMs + hour}`)
    expect([half.hours, half.annunciated]).toEqual([1, journal.filter((t) => t.tMs < all.fromMs + hour).length])
    for (const m of all.mostFrequent) expect(all.names[m.key]).toBeTruthy()

    // USR-08
    const story = await get<AlarmStory>(`alarms/${alarm.id}/before`)
    expect(Value.Check(storySchema, story)).toBe(true)
    expect([story.toMs, story.fromMs]).toEqual([alarm.raisedMs, alarm.raisedMs - hour / 2])
    expect(story.alarm.onset).not.toBeNull()
    expect(story.lines.every((l) => l.tMs > story.fromMs && l.tMs <= story.toMs)).toBe(true)
    expect(story.lines.at(-1)).toMatchObject({ what: 'alarm', alarm: alarm.id, tMs: alarm.raisedMs })
    expect(story.lines.at(-1)!.text).toContain('raised')

    const note = await get<HandOver>('hand-over')
    expect(Value.Check(handOverSchema, note)).toBe(true)
    expect(note.open.map((a) => a.id)).toContain(alarm.id)
    expect(note.comments.map((c) => [c.person, c.text])).toEqual([[person, 'Hand-over: drum A-31 is nearly empty']])
    expect(note.changes.map((c) => c.text)).toEqual(['R1 dpHighBar set to 5: agreed at hand-over'])
    expect(note.raised.high + note.raised.medium + note.raised.low).toBe(alarms.length)
    const { toMs } = note
    const again = `hand-over?fromMs=${note.fromMs}&toMs=${toMs}`
    expect(await get<HandOver>(again)).toEqual(await get<HandOver>(again))
    // Before the alarm nothing of it was known.
    const early = await get<HandOver>(`hand-over?fromMs=${note.fromMs}&toMs=${alarm.raisedMs - 1}`)
    expect(early.open.map((a) => a.id)).not.toContain(alarm.id)
    expect([early.comments, early.changes]).toEqual([[], []])
  }, 60_000)

  // ALM-08, USR-05
  it('an alarm shelved through the API is shelved on the page, in the note and in the figures; what may not be is refused with its reason', async () => {
    const s = await served()
    await s.live(150)
    const state = async () => ((await s.get(`/api/runs/${s.run}/state`)).json() as { alarms: AlarmRow[] }).alarms
    const alarm = (await state()).find((a) => a.kind === 'fouling')!
    const act = async (body: object) =>
      (await s.post(`/api/runs/${s.run}/acts`, body)).json() as { transitions?: { outcome: string; reason: string }[] }
    const long = await act({ kind: 'shelve', alarm: alarm.id, minutes: alarm.shelveMaxMin + 1, reason: 'known, flush is planned' })
    expect(long.transitions).toMatchObject([{ outcome: 'refused' }])
    await act({ kind: 'shelve', alarm: alarm.id, minutes: 20, reason: 'known, flush is planned' })
    const shelved = (await state()).find((a) => a.id === alarm.id)!
    expect(shelved).toMatchObject({
      state: 'SHELVED',
      needsAck: false,
      aside: { person: 'demo operator', reason: 'known, flush is planned' },
    })
    const note = (await s.get(`/api/runs/${s.run}/hand-over`)).json() as HandOver
    expect(note.shelved.map((a) => [a.id, a.shelvedUntilMs])).toEqual([[alarm.id, shelved.shelvedUntilMs]])
    const figures = (await s.get(`/api/runs/${s.run}/alarm-performance`)).json() as AlarmPerformance
    expect([figures.outsideProcedure, figures.refused]).toEqual([0, 1])
    // Twenty minutes later it calls again by itself.
    await s.live(21)
    expect((await state()).find((a) => a.id === alarm.id)).toMatchObject({ state: 'UNACK', aside: null })
    await act({ kind: 'out-of-service', key: alarm.key, reason: 'pressure tap is being changed' })
    expect(((await s.get(`/api/runs/${s.run}/hand-over`)).json() as HandOver).outOfService.map((a) => a.id)).toEqual([alarm.id])
  }, 60_000)

  it('refuses an alarm that is not there and a period that ends before it begins, with the mend', async () => {
    const s = await served()
    await s.live(2)
    const none = await s.get(`/api/runs/${s.run}/alarms/77/before`)
    expect([none.status, none.json()]).toMatchObject([404, { code: 'ALARM_UNKNOWN', hint: 'list its alarms' }])
    const turned = await s.get(`/api/runs/${s.run}/alarm-performance?fromMs=9000&toMs=1000`)
    expect([turned.status, (turned.json() as { code: string }).code]).toEqual([400, 'USAGE'])
    expect((await s.get('/api/runs/99/hand-over')).status).toBe(404)
  })
})
