import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { caution } from '../../server/cli/run.ts'
import type { Report } from '../../server/core/report.ts'
import { benchHeader, benchRows, benchSkid, benchStartMs, cli } from '../helpers/cli.ts'
import { pipeLog } from '../helpers/pipe-log.ts'

const dir = mkdtempSync(join(tmpdir(), 'analyse-'))
afterAll(() => rmSync(dir, { recursive: true }))
const path = (name: string): string => join(dir, name)
const bench = path('bench.yaml')
const run = path('closing.csv')

/** The report of `analyse … --json -`, which must be all that is said. */
async function report(args: readonly string[]): Promise<Report> {
  const { code, out, err } = await cli(['analyse', ...args, '--json', '-'])
  expect([code, err]).toEqual([0, ''])
  return JSON.parse(out) as Report
}
/** Without the notes, which name files. */
const unnamed = ({ notes, ...rest }: Report) => rest

beforeAll(() => {
  writeFileSync(bench, benchSkid)
  writeFileSync(path('bench.csv'), benchHeader + benchRows(600))
  writeFileSync(run, benchHeader + benchRows(2400, 0, undefined, 0.002))
})

describe('analyse', () => {
  it('--json - writes the report alone to stdout, and the same bytes each time', async () => {
    const [a, b] = [
      await cli(['analyse', run, '--skid', bench, '--json', '-']),
      await cli(['analyse', run, '--skid', bench, '--json', '-']),
    ]
    expect(a).toEqual(b)
    expect(JSON.parse(a.out)).toMatchObject({ report: 1, run: { skid: 'bench' } })
    expect([a.code, a.err]).toEqual([0, ''])
  })

  // PRO-30
  it('prints a summary that ends with the caution, and writes the same report with --json FILE', async () => {
    const { code, out } = await cli(['analyse', run, '--skid', bench, '--json', path('r.json')])
    expect(code).toBe(0)
    expect(out.endsWith(`\n\n${caution}`)).toBe(true)
    expect(readFileSync(path('r.json'), 'utf8')).toBe((await cli(['analyse', run, '--skid', bench, '--json', '-'])).out)
  })

  it('two rotated files, given in either order, tell what the one file tells', async () => {
    const [header, ...rows] = readFileSync(run, 'utf8').trim().split('\n')
    writeFileSync(path('log-1.csv'), `${header}\n${rows.slice(0, 1500).join('\n')}\n`)
    writeFileSync(path('log-2.csv'), `${header}\n${rows.slice(1500).join('\n')}\n`)
    const whole = unnamed(await report([run, '--skid', bench]))
    expect(whole.alarms.length).toBeGreaterThan(1)
    expect(unnamed(await report([path('log-1.csv'), path('log-2.csv'), '--skid', bench]))).toEqual(whole)
    expect(unnamed(await report([path('log-2.csv'), path('log-1.csv'), '--skid', bench]))).toEqual(whole)
  })

  it('--from and --to keep the rows of that span, both ends inside it, read in the zone of the skid where they carry none', async () => {
    const args = [path('bench.csv'), '--skid', bench]
    const part = await report([...args, '--from', '2031-05-05T18:02:00', '--to', '2031-05-05T20:05:00+02:00'])
    expect(part.run).toMatchObject({ from: '2031-05-05T18:02:00.000Z', to: '2031-05-05T18:05:00.000Z', rows: { total: 181 } })
  })

  it('--start places elapsed seconds: the same report as with absolute times', async () => {
    writeFileSync(path('elapsed.csv'), benchHeader + benchRows(600, 0, (i) => i.toFixed(1)))
    const elapsed = await report([path('elapsed.csv'), '--skid', bench, '--start', new Date(benchStartMs).toISOString()])
    expect(elapsed).toEqual(await report([path('bench.csv'), '--skid', bench]))
  })

  it('--settings lowers a limit: the ΔP alarm comes earlier, at 3 bar instead of 4', async () => {
    writeFileSync(path('low.yaml'), 'limits: { S1: { dpHighBar: 3 } }\n')
    const dp = ({ alarms }: Report) => alarms.find((a) => a.kind === 'dp-limit' && a.segment === 'S1')!
    const [usual, low] = [
      dp(await report([run, '--skid', bench])),
      dp(await report([run, '--skid', bench, '--settings', path('low.yaml')])),
    ]
    expect([usual.limit, low.limit]).toEqual([4, 3])
    expect(Date.parse(low.raised)).toBeLessThan(Date.parse(usual.raised))
  })

  it('--events reads what people noted, and what the readings say stays the same', async () => {
    writeFileSync(
      path('events.csv'),
      'time,kind,value,unit,person,note\n2031-05-05T18:03:00Z,Karl Fischer,85,ppm,demo operator,drum 2\n',
    )
    const args = [path('bench.csv'), '--skid', bench]
    const { notes, ...told } = await report([...args, '--events', path('events.csv')])
    const { notes: none, ...same } = await report(args)
    expect(told).toEqual(same)
    expect([none, notes]).toEqual([[], ['2031-05-05T18:03:00.000Z Karl Fischer: kept, not used: it names no feed']])
  })

  it('tells progress on stderr when that is a terminal, and nothing when it is not', async () => {
    const args = ['analyse', run, '--skid', bench]
    const { err, out } = await cli(args, { terminal: true })
    expect(err).toMatch(/\ranalyse \d+ % \([\d.]+ of [\d.]+ MB/)
    expect(err.endsWith('\r')).toBe(true)
    expect(await cli(args)).toEqual({ code: 0, out, err: '' })
  })
})

describe('analyse of a stream', () => {
  it('50 MB piped through stdin with a heap of 128 MB peaks below 300 MB of memory', async () => {
    const { rows, report, peakMB } = await pipeLog(bench, 50e6)
    expect(report.run.rows).toMatchObject({ total: rows, late: 0 })
    expect(peakMB).toBeLessThan(300)
  })
})
