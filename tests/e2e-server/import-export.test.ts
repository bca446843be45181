import { mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import Database from 'better-sqlite3'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Report } from '../../server/core/report.ts'
import { demoScenario } from '../../server/core/sim/demo.ts'
import { logText } from '../../server/core/sim/log-text.ts'
import type { RunRow } from '../../server/wire/index.ts'
import { heron, heronFile, tempDir } from '../monitor/bench.ts'
import { bundled, dropBundles, start } from './children.ts'

let main = ''
beforeAll(() => {
  main = bundled('server/main.ts')
})
afterAll(dropBundles)

/** Runs a command to its end. */
async function run(...args: string[]) {
  const child = start(main, args)
  const code = await child.ended
  return { code, out: child.out.join('\n'), err: child.err.join('\n') }
}

/** Some of the demo, forty-five minutes by default, written as a log and imported. */
async function anImport(hours = 0.75) {
  const data = tempDir()
  const log = join(data, 'night.csv')
  const night = demoScenario(heron)
  writeFileSync(
    log,
    [...logText(heron, { ...night, hours, events: night.events.filter((e) => e.atHours < hours) }).lines()].join(''),
  )
  const r = await run('import', log, '--skid', heronFile, '--data', join(data, 'store'), '--title', 'last night')
  expect([r.code, r.err]).toEqual([0, ''])
  return { data: join(data, 'store'), log, run: /^run (\d+)/.exec(r.out)![1]!, out: r.out }
}

describe('import and export', () => {
  it('imports a log, shows it in the list of a server, and exports its alarms, readings and record', async () => {
    const { data, log, run: id, out } = await anImport()
    expect(out).toMatch(/2700 rows, 1 alarm, 2031-05-05T18:00:00\.000Z to 2031-05-05T18:44:59\.000Z/)
    expect(out).toMatch(/Advisory only/)
    const dir = tempDir()
    const to = (name: string) => join(dir, name)
    const written = async (what: string, format: string) => {
      const r = await run('export', id, '--data', data, '--what', what, '--format', format, '--out', to(`${what}.${format}`))
      expect(r.code).toBe(0)
      return readFileSync(to(`${what}.${format}`), 'utf8')
    }
    const [head, ...lines] = (await written('alarms', 'csv')).trimEnd().split('\r\n')
    expect(head).toMatch(/^run,skid,config_version,tool_version,time_utc,time_local,alarm,key,kind,priority,/)
    expect(lines.length).toBe(1)
    expect(lines[0]).toMatch(/,1,fouling:R1,fouling,medium,R1,,NORM,UNACK,act,moved,/)
    expect(lines[0]).toMatch(/2031-05-05T18:\d\d:\d\d\.000Z,2031-05-05T20:\d\d:\d\d\.000\+02:00/)
    const facts = JSON.parse(readFileSync(to('alarms.csv.facts.json'), 'utf8'))
    expect(facts).toMatchObject({
      export: 'alarms',
      run: Number(id),
      rows: 1,
      timeZone: 'Europe/Amsterdam',
      from: '2031-05-05T18:00:00.000Z',
    })
    expect(facts.cautions[0]).toMatch(/Advisory only/)
    const history = JSON.parse(await written('alarms', 'json'))
    expect([history.rows, history.alarms.length, history.history[0].to]).toEqual([1, 1, 'UNACK'])

    const samples = await written('samples', 'csv')
    const numbers = (text: string) =>
      text
        .trimEnd()
        .split('\n')
        .slice(1)
        .map((l) =>
          l
            .split(',')
            .slice(1)
            .map((c) => (Number.isNaN(Number(c)) ? c : Number(c))),
        )
    expect(numbers(samples)).toEqual(numbers(readFileSync(log, 'utf8')))
    const record = JSON.parse(await written('record', 'json')) as { report: Report; skidFile: { text: string } }
    expect(record.report.alarms.map((a) => a.kind)).toEqual(['fouling'])
    expect(record.skidFile.text).toBe(readFileSync(heronFile, 'utf8'))

    const only = await run('export', id, '--data', data, '--what', 'alarms', '--format', 'csv', '--priority', 'high', '--out', '-')
    expect(only.out.trim().split('\n').length).toBe(1)
    const never = await run('export', '77', '--data', data, '--what', 'alarms', '--format', 'csv', '--out', '-')
    expect([never.code, never.err]).toEqual([1, expect.stringContaining('no run 77')])
  })

  // REC-11
  it('verifies the store and its record, and names what a person changed in either', async () => {
    const { data, run: id, out } = await anImport(0.1)
    const fingerprint = /fingerprint {2}([0-9a-f]{32})/.exec(out)![1]!
    const sound = await run('verify', '--data', data)
    expect([sound.code, sound.err, sound.out]).toEqual([
      0,
      '',
      expect.stringMatching(/360 rows of readings sealed, 0 not yet[\s\S]*UNTOUCHED/),
    ])
    expect(sound.out).toContain(fingerprint)
    const file = join(tempDir(), 'record.json')
    await run('export', id, '--data', data, '--what', 'record', '--format', 'json', '--out', file)
    const record = await run('verify', file)
    expect([record.code, record.out]).toEqual([0, expect.stringContaining('360 rows of readings as they were sealed, 0 covered')])
    expect(record.out).toContain(fingerprint)
    expect((await run('verify', '--data', data, '--against', file)).code).toBe(0)
    writeFileSync(file, readFileSync(file, 'utf8').replace('simulated', 'simulAted').replace('thiophene', 'thiophane'))
    const touched = await run('verify', file)
    expect([touched.code, touched.out]).toEqual([1, expect.stringContaining('NOT UNTOUCHED. First bad record')])
    const db = new Database(join(data, 'clearbore.db'))
    db.exec("DROP TRIGGER run_stays; UPDATE run SET skid_text = replace(skid_text, 'dpHighBar: 6', 'dpHighBar: 7') WHERE id = 1")
    db.close()
    const told = await run('verify', '--data', data)
    expect(told.code).toBe(1)
    expect(told.out).toMatch(
      /NOT UNTOUCHED\. First bad record: run 1, record 0 of 20\d\d-\S+: first record: what it stands for was changed in the store/,
    )
  })

  it('keeps nothing of an import that fails, and tells the line', async () => {
    const dir = tempDir()
    const log = join(dir, 'bad.csv')
    const data = join(dir, 'store')
    mkdirSync(data)
    writeFileSync(
      log,
      `time,"PT-101 feed A [bar]"\n${Array.from({ length: 30 }, (_, i) => `2031-05-05T18:00:${String(i).padStart(2, '0')}Z,6.5\n`).join('')}05/05/2031 18:01:00,6.5\n`,
    )
    const r = await run('import', log, '--skid', heronFile, '--data', data)
    expect([r.code, r.err.split('\n').length]).toEqual([1, 1])
    expect(r.err).toMatch(/bad\.csv:32:1: found a date format that changes/)
    const child = start(main, ['serve', '--data', data, '--port', '0'])
    const [, at] = await child.line(/^Clearbore \S+: (http:\S+)/)
    const rows = (await (await fetch(`${at}api/runs`)).json()) as RunRow[]
    expect(rows.map((x) => x.kind)).toEqual(['simulated'])
    child.process.kill('SIGTERM')
    await child.ended
  })

  it('ends with 3 and one line where the export cannot be written', async () => {
    const { data, run: imported } = await anImport(0.02)
    const file = join(tempDir(), 'file')
    writeFileSync(file, '')
    const args = ['--data', data, '--what', 'samples', '--format', 'csv', '--out', join(file, 'x.csv')]
    const r = await run('export', imported, ...args)
    expect([r.code, r.err.split('\n').length]).toEqual([3, 1])
    expect(r.err).toMatch(/x\.csv: cannot write/)
  })
})
