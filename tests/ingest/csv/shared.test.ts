import { existsSync, readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import { logFormat, mistake, read, skidOf, tag } from './helpers.ts'

const root = '../shared'
const has = existsSync(`${root}/datasets`)
const bytes = (path: string): Uint8Array => readFileSync(`${root}/${path}`)
const json = (path: string) => JSON.parse(readFileSync(`${root}/${path}`, 'utf8'))
const sum = (v: readonly (number | null)[]): number => v.reduce<number>((a, b) => a + (b ?? 0), 0)
/** Steps as truth.json gives them: time and value to a tenth. */
const tenths = (x: number): number => Math.round(x * 10) / 10
const steps = (t: readonly number[], v: readonly (number | null)[]): [number, number][] =>
  v.flatMap((x, i) => (i > 0 && x !== v[i - 1] ? [[tenths(t[i]!), tenths(x!)] as [number, number]] : []))

if (!has) it('../shared is not here: the files of open datasets are not read in this run', () => expect(existsSync(root)).toBe(has))

describe.runIf(has)('UCI Air Quality in three dialects (CC BY 4.0), against truth.json', () => {
  const truth = has ? json('datasets/csv-format-variants/open/truth.json') : { columns: {} }
  const names = Object.keys(truth.columns)
  const start = Date.parse('2004-03-10T18:00:00Z')
  const cases = [
    ['comma_quoted_decimal_comma_dmy.csv', { time: ['Date', 'Time'], timeFormat: ['dd/MM/yyyy HH.mm.ss'], missing: [-200] }],
    ['comma_quoted_decimal_comma_dmy.csv', { missing: [-200] }],
    ['semicolon_decimal_comma_crlf_noDate.csv', { missing: [-200] }],
    ['comma_point_mdy.csv', { time: ['Date', 'Time'], timeFormat: ['MM-dd-yyyy HH.mm.ss', 'M/d/yyyy H.mm.ss'], missing: [-200] }],
    ['comma_point_mdy.csv', { time: ['Date', 'Time'], timeFormat: ['MM-dd-yyyy', 'M/d/yyyy'], missing: [-200] }],
  ] as const
  it.each(cases)('%s as %j: 300 hourly rows, missing cells and sums as published', (file, log) => {
    const skid = skidOf(names, { log: [logFormat(log)] })
    const { t, values, codes, tally } = read(bytes(`datasets/csv-format-variants/open/${file}`), skid, {
      startMs: start,
      name: file,
    })
    expect(tally.broken).toBe(0)
    expect(t).toEqual(Array.from({ length: 300 }, (_, i) => start + 3_600_000 * i))
    names.forEach((n, i) => {
      expect([n, codes[i]!.filter((c) => c === 2).length]).toEqual([n, truth.columns[n].missing])
      expect([n, Math.round(sum(values[i]!) * 10) / 10]).toEqual([n, truth.columns[n].sum])
    })
  })
  it('refuses the switch from MM-dd-yyyy to M/d/yyyy at line 56 when one format is given', () => {
    const skid = skidOf(names, { log: [logFormat({ time: ['Date', 'Time'], timeFormat: ['MM-dd-yyyy HH.mm.ss'] })] })
    const e = mistake(() => read(bytes('datasets/csv-format-variants/open/comma_point_mdy.csv'), skid))
    expect([e.code, e.place?.line]).toEqual(['CSV_TIME', 56])
  })
  it('refuses a bare time of day without a start', () => {
    const e = mistake(() => read(bytes('datasets/csv-format-variants/open/semicolon_decimal_comma_crlf_noDate.csv'), skidOf(names)))
    expect(e.line()).toMatch(/:2:1: found a time of day .*--start/)
  })
})

describe.runIf(has)('two logs of one microfluidic rig, against truth.json', () => {
  const truth = has ? json('datasets/rig-logs-awkward/open/truth.json') : {}
  it('tab separated, trailing tab, elapsed seconds: 6000 rows, 25 set-point steps, sum 727573.196', () => {
    const skid = skidOf([
      tag('SP', { column: 'Drucki Ch.  2(Target)[mbar]', unit: 'mbar' }),
      tag('PV', { column: 'Drucki Ch.  2(Read)[mbar]', unit: 'mbar' }),
    ])
    const { t, values, tally } = read(bytes('datasets/rig-logs-awkward/open/pressure_log_first600s.txt'), skid, { startMs: 0 })
    const p = truth.pressure
    expect([t.length, t[0]! / 1000, t.at(-1)! / 1000, tally.broken]).toEqual([p.rows, p.first_time_s, p.last_time_s, 0])
    expect(steps(t.map((x) => x / 1000), values[0]!)).toEqual(p.channel2_setpoint_steps) // biome-ignore format: one line
    expect(Math.round(sum(values[1]!) * 1000) / 1000).toBe(p.sum_check_channel2_read)
    expect([Math.min(...(values[1] as number[])), Math.max(...(values[1] as number[]))]).toEqual(p.channel2_read_min_max)
  })
  const flows = ['SyringePump_1.ActualFlow', 'SyringePump_2.ActualFlow', 'SyringePump_3.ActualFlow']
  it('every field quoted, decimal comma: 6000 rows by elapsed time, steps and sums of three pumps', () => {
    const { t, values } = read(bytes('datasets/rig-logs-awkward/open/pump_log_first600s.csv'), skidOf(flows), { startMs: 0 })
    const p = truth.pump
    expect([t.length, t[0]! / 1000, t.at(-1)! / 1000]).toEqual([p.rows, p.first_time_s, p.last_time_s])
    for (const k of [1, 2, 3]) {
      expect(steps(t.map((x) => x / 1000), values[k - 1]!)).toEqual(p[`pump${k}_steps`]) // biome-ignore format: one line
      expect(sum(values[k - 1]!)).toBe(p[`pump${k}_sum`])
    }
  })
  it('reads its absolute stamps with a colon before the ms, given or found', () => {
    for (const timeFormat of [['yyyy-MM-dd HH:mm:ss:SSS'], []]) {
      const skid = skidOf(flows, { log: [logFormat({ time: ['Abs.Timestamp'], timeFormat })] })
      const { t } = read(bytes('datasets/rig-logs-awkward/open/pump_log_first600s.csv'), skid)
      expect([t.length, t[0], t.at(-1)]).toEqual([
        6000,
        Date.parse('2022-08-05T15:06:34.569Z'),
        Date.parse('2022-08-05T15:16:34.495Z'),
      ])
    }
  })
})

describe.runIf(has)('twelve simulated runs (bench-open), against truth.json', () => {
  const cases = Array.from({ length: 12 }, (_, i) => `o-${String(i + 1).padStart(3, '0')}`)
  it.each(cases)('%s: every row counted, broken rows and empty cells as in dirty', (id) => {
    const file = json(`bench-open/${id}/skid.json`)
    const { dirty, from } = json(`bench-open/${id}/truth.json`)
    const skid = skidOf(
      file.tags.map((t: { tag: string; column?: string; unit?: string }) =>
        tag(t.tag, { column: t.column ?? t.tag, unit: (t.unit ?? null) as never }),
      ),
      { phaseColumn: file.phaseColumn ?? null, timeZone: file.timeZone },
    )
    const { t, codes, tally } = read(bytes(`bench-open/${id}/run.csv`), skid)
    expect(tally.tagsMissing).toEqual([])
    expect([tally.rows, tally.broken]).toEqual([dirty.rows, dirty.brokenRows])
    expect(t.length).toBe(dirty.rows - dirty.brokenRows)
    expect(Math.abs(t[0]! - Date.parse(from))).toBeLessThan(5000)
    const missing = codes.flat().filter((c) => c === 2).length
    // Broken rows hold empty cells too: lines 950 and 1075 lie in the gap of PT-102, 3910 and 4323 in the gap of all 16 tags.
    const inBroken = id === 'o-012' ? 2 + 2 * 16 : 0
    expect(missing + inBroken).toBe(Object.values<number>(dirty.nanCells).reduce((a, b) => a + b, 0))
  })
})

describe.runIf(has)('other rigs', () => {
  it('filter-clogging-liquid: 3250 rows at 10 Hz in elapsed seconds, 17 digits read bit-identically', () => {
    const skid = skidOf([
      tag('PU', { column: 'Upstream_Pressure(psi)', unit: 'psi' }),
      tag('FL', { column: 'Flow_Rate(ml/m)', unit: 'mL/min', quantity: 'volumeFlow' }),
    ])
    const { t, values } = read(bytes('datasets/filter-clogging-liquid/open/Sample01.csv'), skid, { startMs: 0 })
    expect([t.length, t.at(-1), values[0]![0], values[0]![1]]).toEqual([3250, 324_900, -0.29999999999999644, 0.6124999999999999])
  })
  it('heater-temperature-steps: exponents; the file without a header is refused with what to do', () => {
    const skid = skidOf([tag('Q1', { quantity: 'output', unit: '%' }), tag('TC1', { quantity: 'temperature', unit: 'degC' })])
    const { t, values } = read(bytes('datasets/heater-temperature-steps/open/two_heaters_3s_exponent.csv'), skid, { startMs: 0 })
    const truth = json('datasets/heater-temperature-steps/open/truth.json').files
    expect([t.length, t.at(-1)]).toEqual([201, 600_000])
    expect(steps(t.map((x) => x / 1000), values[0]!)).toEqual(truth['two_heaters_3s_exponent.csv'].heater_steps_time_value.heater1) // biome-ignore format: one line
    expect([Math.min(...(values[1] as number[])), Math.max(...(values[1] as number[]))]).toEqual(
      truth['two_heaters_3s_exponent.csv'].temperature_min_max[0],
    )
    const e = mistake(() => read(bytes('datasets/heater-temperature-steps/open/heater1_kelvin_noheader.csv'), skid, { startMs: 0 }))
    expect([e.code, e.place?.line]).toEqual(['CSV_HEADER', 1])
    expect(e.line()).toMatch(/found values in the first row .* put a line with the column names on top/)
  })
})
