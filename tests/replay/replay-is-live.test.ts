import { writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { analyseLog, fileSource } from '../../server/analyse.ts'
import { reportText } from '../../server/core/pipeline/collect.ts'
import type { Report } from '../../server/core/report.ts'
import { importRun } from '../../server/import-run.ts'
import { createPair } from '../../server/monitor/catalogue.ts'
import { createEngine } from '../../server/monitor/engine.ts'
import { analyseRecord } from '../../server/record/analyse-record.ts'
import { loadSkid } from '../../server/skid/check.ts'
import { openStore } from '../../server/store/open.ts'
import type { AlarmRow } from '../../server/wire/index.ts'
import { served } from '../http/served.ts'
import { heron, heronText, shortNight, tempDir } from '../monitor/bench.ts'

describe('replay is live', () => {
  it('lives 80 min of the demo through the server with an acknowledge, comments, a changed limit, versions of the settings for now and for later, entries by hand and refused requests; its exported record, analysed, gives the same report and alarms', async () => {
    const hours = 80 / 60
    const s = await served({ scenario: shortNight(hours) })
    const acts = `/api/runs/${s.run}/acts`
    const ok = async (body: object) => expect((await s.post(acts, body)).status).toBe(200)
    await s.live(20)
    await ok({ kind: 'comment', alarm: null, text: 'drum 7 of feed A connected' })
    await s.live(15)
    const alarms = (await s.get(`/api/runs/${s.run}/alarms`)).json() as AlarmRow[]
    expect(alarms.map((a) => a.kind)).toEqual(['fouling'])
    await ok({ kind: 'acknowledge', alarm: alarms[0]!.id })
    // Just above clean, so that the limit itself alarms later.
    await ok({ kind: 'limit', segment: 'R1', limit: 'dpHighBar', value: 2.05, reason: 'a gasket under suspicion' })
    const nowMs = s.monitor.clock(s.run).nowMs
    const reason = 'trial of other settings'
    const settings = (inMs: number, ...changes: { path: string; new: unknown }[]) =>
      s.post('/api/skids/heron/settings', { reason, effectiveMs: inMs === 0 ? null : nowMs + inMs, changes })
    for (const reply of [
      await settings(0, { path: 'detection.riseToFindPct', new: 4 }, { path: 'disturbances.wander', new: 0.0025 }),
      await settings(
        600_000,
        { path: 'alarms.exotherm.offDelaySeconds', new: 20 },
        { path: 'segments.R2.limits.feedRatio.high', new: 1.4 },
      ),
    ])
      expect(reply.status).toBe(200)
    await ok({ kind: 'event', event: 'Karl Fischer', value: 140, unit: 'ppm', note: 'drum 7', of: 'A' })
    await ok({ kind: 'out-of-service', key: 'flow:PC:flowLow', reason: 'pump is checked' })
    // A high alarm may not be shelved, and a reason of two letters is none: both are refused and on record.
    await ok({ kind: 'shelve', alarm: 1, minutes: 5, reason: 'no' })
    expect((await settings(0, { path: 'tags.PT-101.column', new: 'x' })).status).toBe(400)
    await s.live(20)
    await ok({ kind: 'comment', alarm: alarms[0]!.id, text: 'water result asked for' })
    await s.live(26)
    expect(s.monitor.engine(s.run)).toBeNull()

    const live = (await s.get(`/api/runs/${s.run}/report`)).json() as Report
    expect(live.alarms.map((a) => a.kind)).toEqual(expect.arrayContaining(['fouling', 'dp-limit', 'exotherm']))
    const file = join(tempDir(), 'record.json')
    const exported = await s.get(`/api/runs/${s.run}/export/record.json`)
    writeFileSync(file, exported.text)
    const again = await analyseRecord(file, loadSkid)
    expect(again.report.alarms).toEqual(live.alarms)
    expect(reportText(again.report)).toBe(reportText(live))
    const record = JSON.parse(exported.text) as { transitions: { input: string; person: string | null }[]; cautions: string[] }
    expect(record.transitions.filter((t) => t.person !== null).map((t) => [t.input, t.person])).toEqual([
      ['ack', 'demo operator'],
      ['oos+', 'demo operator'],
      ['shv', 'demo operator'],
      ['comment', 'demo operator'],
    ])
    expect(record.cautions[0]).toContain('Advisory only')
    // Without the changed limit the run would have told something else: the acts matter.
    const acted = live.alarms.find((a) => a.kind === 'dp-limit')!
    expect(acted.limit).toBe(2.05)
    expect(live.run.configuration.map((c) => c.version)).toEqual([0, 2, 3, null, 4])
  })

  it('imports the readings it exported as a run of its own: the same report as analyse gives of the file, stored journal included', async () => {
    const s = await served({ scenario: shortNight(0.75) })
    await s.live(46)
    const dir = tempDir()
    const csv = join(dir, 'samples.csv')
    writeFileSync(csv, (await s.get(`/api/runs/${s.run}/export/samples.csv`)).text)
    const live = (await s.get(`/api/runs/${s.run}/report`)).json() as Report
    const analysed = (await analyseLog({ skid: heron, sources: [fileSource(csv)] })).report
    expect(reportText({ ...analysed, notes: [] })).toBe(reportText({ ...live, notes: [] }))

    const store = openStore(join(dir, 'store'), { synchronous: 'NORMAL' })
    const pair = createPair(store, {
      kind: 'imported', about: 'samples.csv', skidId: 'heron', title: 't', skidFile: 'heron.yaml', skidText: heronText, startedMs: 0, toolVersion: 't',
      state: 'importing',
    }) // biome-ignore format: a list
    const { rows } = await importRun({ store, ...pair, skid: heron, sources: [fileSource(csv)], startMs: null, acts: [] })
    expect(rows).toBe(2700)
    expect(reportText(createEngine({ store, ...pair, skid: heron }).report())).toBe(reportText({ ...analysed, notes: [] }))
    expect(store.runs.get(pair.run).state).toBe('ended')
    expect(store.check()).toEqual([])
    store.close()
  })
})
