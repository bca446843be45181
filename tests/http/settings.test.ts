import { writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { reportText } from '../../server/core/pipeline/collect.ts'
import type { Report } from '../../server/core/report.ts'
import * as schemas from '../../server/http/schemas.ts'
import { settingsComparisonSchema, settingsPageSchema } from '../../server/http/settings-schemas.ts'
import { readEvents } from '../../server/ingest/events-file.ts'
import { analyseRecord } from '../../server/record/analyse-record.ts'
import { loadSkid } from '../../server/skid/check.ts'
import type {
  ActRow,
  LiveState,
  Marks,
  SettingsComparison,
  SettingsPage,
  SkidFacts,
  TransitionRow,
} from '../../server/wire/index.ts'
import { cli } from '../helpers/cli.ts'
import { shortNight, tempDir } from '../monitor/bench.ts'
import { holds } from './holds.ts'
import { type Served, served } from './served.ts'

const limit = 'segments.R1.limits.dpHighBar'
const reason = 'a gasket under suspicion'
const change = (s: Served, body: object) => s.post('/api/skids/heron/settings', { reason, effectiveMs: null, ...body })
const page = async (s: Served) => (await s.get('/api/skids/heron/settings')).json() as SettingsPage
const report = async (s: Served) => (await s.get(`/api/runs/${s.run}/report`)).json() as Report

describe('settings of a skid over HTTP', () => {
  // REC-06 USR-06
  it('a change at once and one for later make versions 2 and 3; page, comparison, state, marks and report tell of them; the exported record replays to the same report', async () => {
    const s = await served({ scenario: shortNight(0.8) })
    await s.live(20)
    const empty = await page(s)
    holds(settingsPageSchema, empty)
    expect([empty.run, empty.version, empty.versions]).toEqual([s.run, 0, []])
    expect(empty.settings.find((x) => x.path === limit)).toMatchObject({ value: 6, unit: 'bar' })

    const now = await change(s, { changes: [{ path: limit, new: 5.5 }] })
    expect(now.status).toBe(200)
    holds(schemas.actReplySchema, now.json())
    const { nowMs } = s.monitor.clock(s.run)
    const laterMs = nowMs + 600_000
    const later = await change(s, { effectiveMs: laterMs, changes: [{ path: limit, new: 1.5 }, { path: 'alarms.dp-limit:R1.priority', new: 'high' }] }) // biome-ignore format: a list
    expect(later.status).toBe(200)
    const events = [
      { kind: 'event', event: 'Karl Fischer', value: 0.021, unit: '%', note: 'drum 7', of: 'A', atMs: nowMs - 3_600_000 },
      { kind: 'out-of-service', key: 'sensor:TT-111', reason: 'thermocouple is replaced' },
    ]
    for (const body of events) expect((await s.post(`/api/runs/${s.run}/acts`, body)).status).toBe(200)

    const between = await page(s)
    holds(settingsPageSchema, between)
    expect(between.versions.map((v) => [v.version, v.kind, v.person, v.planned, v.changes.map((c) => [c.old, c.new])])).toEqual([
      [1, 'file', 'file', false, []],
      [2, 'change', 'demo operator', false, [[6, 5.5]]],
      [3, 'change', 'demo operator', true, [[5.5, 1.5], [null, 'high']]],
    ]) // biome-ignore format: a list
    expect(between.version).toBe(2)
    expect(between.settings.find((x) => x.path === 'streams.A.waterPpm')!.value).toBe(210)
    const of = async () => ((await s.get(`/api/runs/${s.run}/state`)).json() as LiveState).segments.find((g) => g.segment === 'R1')!.limits.dpHighBar // biome-ignore format: a list
    expect(await of()).toBe(5.5)
    await s.live(40)
    expect(s.monitor.engine(s.run)).toBeNull()
    expect(await of()).toBe(1.5)
    const asWas = (await s.get(`/api/runs/${s.run}/state?atMs=${laterMs - 60_000}`)).json() as LiveState
    expect(asWas.segments.find((g) => g.segment === 'R1')!.limits.dpHighBar).toBe(5.5)

    // The trend draws the limit as it was: three steps, each at its time.
    const marks = (await s.get(`/api/runs/${s.run}/marks`)).json() as Marks
    const steps = marks.limits.filter((l) => l.segment === 'R1' && l.limit === 'dpHighBar')
    expect(steps.map((l) => [l.value, l.person, l.reason])).toEqual([
      [6, null, null],
      [5.5, 'demo operator', reason],
      [1.5, 'demo operator', reason],
    ])
    expect(Math.abs(steps[2]!.fromMs - laterMs)).toBeLessThanOrEqual(1000)

    const facts = (await s.get(`/api/runs/${s.run}`)).json().skidFacts as SkidFacts
    expect(facts.streams.find((x) => x.id === 'A')!.waterPpm).toBe(210)
    expect(facts.segments.find((x) => x.id === 'R1')!.limits.dpHighBar).toBe(1.5)
    const live = await report(s)
    expect(live.run.configuration.map((c) => c.version)).toEqual([0, 2, null, 3])
    const alarm = live.alarms.find((a) => a.kind === 'dp-limit' && a.segment === 'R1')!
    expect(alarm).toMatchObject({ limit: 1.5, priority: 'high', configuration: 3 })
    expect(Date.parse(alarm.raised)).toBeGreaterThanOrEqual(laterMs)
    const compared = (await s.get('/api/skids/heron/settings/compare?from=1&to=3')).json() as SettingsComparison
    holds(settingsComparisonSchema, compared)
    expect(compared.changes.map((c) => [c.path, c.unit, c.old, c.new])).toEqual([
      ['alarms.dp-limit:R1.priority', null, null, 'high'],
      [limit, 'bar', 6, 1.5],
    ])
    const file = join(tempDir(), 'record.json')
    writeFileSync(file, (await s.get(`/api/runs/${s.run}/export/record.json`)).text)
    const again = await analyseRecord(file, loadSkid)
    expect(reportText(again.report)).toBe(reportText(live))
    expect(await cli(['analyse', file, '--json', '-'])).toEqual({ code: 0, out: reportText(live), err: '' })
    // The change list stands on page one of what analyse prints.
    const { out } = await cli(['analyse', file])
    const lines = out.slice(out.indexOf('Settings changed:'), out.indexOf('Alarms:')).trimEnd().split('\n')
    expect(lines.slice(1).map((l) => l.replace(/^ +\S+ +/, ''))).toEqual([
      `version 2  ${limit} 6 bar → 5.5 bar (demo operator: ${reason})`,
      'entered  streams.A.waterPpm 85 ppm → 210 ppm (demo operator: Karl Fischer)',
      `version 3  ${limit} 5.5 bar → 1.5 bar; alarms.dp-limit:R1.priority not set → high (demo operator: ${reason})`,
    ])
    const wrong = await cli(['analyse', file, '--skid', 'heron.yaml'])
    expect([wrong.code, wrong.err]).toEqual([2, expect.stringContaining('--skid does not go with a record')])
    const oos = ((await s.get(`/api/runs/${s.run}/transitions`)).json() as TransitionRow[]).filter((t) => t.input === 'oos+')
    expect(oos.map((t) => [t.key, t.to, t.person, t.reason])).toEqual([
      ['sensor:TT-111', 'OOS', 'demo operator', 'thermocouple is replaced'],
    ])
    expect(s.store.check()).toEqual([])
  })

  // USR-05 ALM-10
  it('refuses with 400 and what is wrong, changes nothing, and keeps what was asked in the audit trail', async () => {
    const s = await served()
    await s.live(2)
    const wrong: [object, string][] = [
      [{ reason: 'so', changes: [{ path: limit, new: 5 }] }, 'at least 5 characters'],
      [{ changes: [{ path: 'tags.PT-101.column', new: 'x' }] }, 'cannot change within a run'],
      [{ changes: [{ path: limit, new: 60 }] }, 'dpHighHighBar'],
      [{ changes: [{ path: 'suppression.rest.alarms', new: ['flow'] }] }, 'phases'],
    ]
    for (const [body, says] of wrong) {
      const reply = await change(s, body)
      expect([reply.status, reply.json().code]).toEqual([400, 'ACT_REFUSED'])
      expect(reply.json().message).toContain(says)
    }
    expect((await change(s, { changes: [] })).status).toBe(400)
    const event = await s.post(`/api/runs/${s.run}/acts`, {
      kind: 'event',
      event: 'Karl Fischer',
      value: 3,
      unit: 'mL',
      note: '',
      of: 'A',
    })
    expect([event.status, event.json().message]).toEqual([400, 'Karl Fischer needs its unit, one of ppm, mg/kg, %'])
    expect((await page(s)).versions).toEqual([])
    expect(s.store.sequence.acts(s.run)).toEqual([])
    expect(s.store.audit.list().map((a) => [a.act, a.person, a.run])).toEqual([
      ...wrong.map(() => ['settings.refused', 'demo operator', s.run]),
      ['run.refused', 'demo operator', s.run],
    ])
    expect((await s.get('/api/skids/wren/settings')).status).toBe(404)
    expect((await s.get('/api/skids/heron/settings/compare?from=1&to=9')).json().code).toBe('SETTINGS_UNKNOWN')
  })

  it('on an ended run takes a comment and a result beside it, with the time of recording, and its report stays as it was; settings are read only', async () => {
    const s = await served({ scenario: shortNight(0.2) })
    await s.live(14)
    expect(s.monitor.engine(s.run)).toBeNull()
    const before = reportText(await report(s))
    const kf = {
      kind: 'event',
      event: 'Karl Fischer',
      value: 240,
      unit: 'ppm',
      note: 'from the laboratory',
      of: 'A',
      atMs: Date.UTC(2030, 11, 31, 20),
    }
    const reply = await s.post(`/api/runs/${s.run}/acts`, kf)
    expect(reply.status).toBe(200)
    holds(schemas.actReplySchema, reply.json())
    expect((await s.post(`/api/runs/${s.run}/acts`, { kind: 'comment', alarm: null, text: 'lot released' })).status).toBe(200)
    const acts = (await s.get(`/api/runs/${s.run}/acts`)).json() as ActRow[]
    expect(acts.map((a) => [a.seq, a.act.kind, a.act.tMs, a.act.person])).toEqual([
      [null, 'event', Date.UTC(2031, 0, 1), 'demo operator'],
      [null, 'comment', Date.UTC(2031, 0, 1), 'demo operator'],
    ])
    expect(reportText(await report(s))).toBe(before)
    const csv = (await s.get(`/api/runs/${s.run}/export/events.csv`)).text
    expect(csv.split('\r\n').slice(0, 2)).toEqual([
      'time,kind,value,unit,person,note,of,taken,recorded',
      '2031-01-01T00:00:00.000Z,Karl Fischer,240,ppm,demo operator,from the laboratory,A,2030-12-31T20:00:00.000Z,after the end',
    ])
    const { atMs } = kf
    expect(readEvents('events.csv', new TextEncoder().encode(csv), 'UTC')).toEqual([
      { ...kf, atMs, person: 'demo operator', tMs: Date.UTC(2031, 0, 1) },
      {
        kind: 'event',
        event: 'comment',
        value: null,
        unit: null,
        note: 'lot released',
        person: 'demo operator',
        tMs: Date.UTC(2031, 0, 1),
      },
    ])
    const refused = await change(s, { changes: [{ path: limit, new: 5 }] })
    expect([refused.status, refused.json().code]).toEqual([409, 'RUN_ENDED'])
    expect((await page(s)).run).toBeNull()
  })
})
