import { spawnSync } from 'node:child_process'
import { existsSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import type { Measured } from './common.ts'
import { writeLog } from './input.ts'

/** A line of the table: what was reached, what is to be reached, and whether it is. */
interface Row {
  readonly what: string
  readonly value: number
  readonly unit: string
  readonly target: string
  readonly verdict: 'met' | 'missed' | 'not measured'
  readonly detail: string
}

const here = dirname(fileURLToPath(import.meta.url))
const quick = process.argv.includes('--quick')
const pairs = quick ? 2 : 5
const rowsOfDay = 864_000
const rowsTable: Row[] = []

const middle = (xs: readonly number[]): number => [...xs].sort((a, b) => a - b)[xs.length >> 1]!
const short = (x: number): string => (Math.abs(x) >= 100 ? x.toFixed(0) : Math.abs(x) >= 10 ? x.toFixed(1) : x.toFixed(2))
const spread = (xs: readonly number[]): string => `${short(Math.min(...xs))}-${short(Math.max(...xs))}`

/** One measure in a process of its own. */
function measure(...args: (string | number)[]): Measured {
  const run = spawnSync(process.execPath, [join(here, 'measures.js'), ...args.map(String)], {
    encoding: 'utf8',
    maxBuffer: 1 << 26,
  })
  if (run.status !== 0) throw new Error(`${args.join(' ')}: ${run.stderr.slice(-2000)}`)
  return JSON.parse(run.stdout) as Measured
}

function row(what: string, value: number, unit: string, target: string, met: boolean, detail: string): void {
  rowsTable.push({ what, value, unit, target, verdict: met ? 'met' : 'missed', detail })
  process.stderr.write(`${what}: ${short(value)} ${unit} (${target}) ${met ? 'met' : 'MISSED'}; ${detail}\n`)
}

/** Two measures turn by turn; the results of both must agree to the last bit. */
function turns(a: readonly (string | number)[], b: readonly (string | number)[]) {
  const first: Measured[] = []
  const second: Measured[] = []
  for (let i = 0; i < pairs; i++) {
    first.push(measure(...a))
    second.push(measure(...b))
  }
  const sums = new Set([...first, ...second].map((m) => m.sum))
  if (sums.size !== 1 || sums.has(undefined)) throw new Error(`${a[0]} and ${b[0]} did not read the same`)
  const ratios = second.map((m, i) => m.cpuS / first[i]!.cpuS)
  return {
    ratio: middle(ratios),
    detail: `${b[0]} ${short(middle(second.map((m) => m.cpuS)))} s, ${a[0]} ${short(middle(first.map((m) => m.cpuS)))} s CPU, ratios ${spread(ratios)}, same sums`,
    second,
  }
}

/** The analysis script of the yardsticks, where it and its libraries are at hand: CPU, s. */
function scripted(file: string): number | null {
  const script = join(here, '..', '..', '..', 'shared', 'perf', 'analyse.py')
  if (!existsSync(script)) return null
  for (const python of ['python3', '/usr/bin/python3']) {
    const run = spawnSync(python, [script, 'vector', file], { encoding: 'utf8' })
    const cpu = run.status === 0 ? /'cpu': ([\d.]+)|cpu=([\d.]+)/.exec(run.stdout) : null
    if (cpu !== null) return Number(cpu[1] ?? cpu[2])
  }
  return null
}

function all(dir: string): void {
  const clean = join(dir, 'clean.csv')
  const messy = join(dir, 'messy.csv')
  writeLog(clean, rowsOfDay, 'normal')
  writeLog(messy, rowsOfDay / 4, 'messy')

  const reader = turns(['bound', clean], ['read', clean])
  row('reader, clean', reader.ratio, 'x the bound', 'at most 2', reader.ratio <= 2, reader.detail)
  const rough = turns(['split', messy], ['read', messy])
  row('reader, messy', rough.ratio, 'x the split script', 'at most 1', rough.ratio <= 1, rough.detail)

  const whole = turns(['bound', clean], ['import', clean, 'check'])
  row(
    'import, whole pipeline',
    whole.ratio,
    'x the bound',
    'at most 6',
    whole.ratio <= 6,
    `${whole.detail}, ${whole.second[0]!.figures!['alarms']} alarm events`,
  )
  const script = scripted(clean)
  if (script === null)
    rowsTable.push({
      what: 'import against the analysis script', value: 0, unit: '', target: 'at least 2.5 times faster', verdict: 'not measured', detail: 'no script here, or no Python with pandas and scipy',
    }) // biome-ignore format: a row
  else {
    const faster = script / middle(whole.second.map((m) => m.cpuS))
    row(
      'import against the analysis script',
      faster,
      'times faster',
      'at least 2.5',
      faster >= 2.5,
      `script ${short(script)} s CPU`,
    )
  }

  const sizes = { normal: 1.2, hard: 2.7, random: 8.6 } as const
  for (const kind of ['normal', 'hard', 'random'] as const) {
    const f = measure('size', kind, rowsOfDay / 10).figures!
    const exact = f['wrong'] === 0 && f['missing'] === 0
    row(
      `database, ${kind}`,
      f['bytesASample']!,
      'bytes a sample',
      `at most ${sizes[kind]}, bit-exact`,
      exact && f['bytesASample']! <= sizes[kind],
      exact ? 'bit-exact' : `${f['wrong']} wrong, ${f['missing']} rows missing`,
    )
  }

  const t = measure('traces', 28, quick ? 1 : 10).figures!
  const longer = t['longMs']! / t['shortMs']!
  row(
    '12 traces, whole run of 28 days',
    longer,
    'x one day',
    'at most 1.5, every extreme',
    longer <= 1.5 && t['lost'] === 0,
    `${short(t['longMs']!)} ms and ${short(t['shortMs']!)} ms${quick ? ' at 1 Hz' : ''}, ${t['lost']} extremes lost`,
  )
  const h = measure('hour', 1).figures!
  const faster = h['theirsMs']! / h['oursMs']!
  row(
    'one hour, 24 channels',
    faster,
    'times faster than a row a scan',
    'at least 20',
    faster >= 20 && h['same'] === 1,
    `${short(h['oursMs']!)} ms and ${short(h['theirsMs']!)} ms CPU, ${h['same'] === 1 ? 'same readings' : 'OTHER READINGS'}`,
  )

  const part = join(dir, 'part.csv')
  writeLog(part, rowsOfDay / 10, 'normal')
  const few = measure('import-days', part, 1).rssMb
  const one = measure('import-days', clean, 1).rssMb
  const many = quick ? null : measure('import-days', clean, 7).rssMb
  const most = Math.max(one, many ?? 0)
  row(
    'memory of an import',
    most,
    'MB at most',
    'at most 150',
    most <= 150,
    `2.4 h ${short(few)}, 24 h ${short(one)}, 7 days ${many === null ? 'not looked at' : short(many)} MB`,
  )
  row('memory, 24 h over 2.4 h', one / few, 'x', 'at most 1.2', one / few <= 1.2, '')
  if (many !== null) row('memory, 7 days over 24 h', many / one, 'x', 'at most 1.1', many / one <= 1.1, '')

  const c = measure('commits', quick ? 60 : 300).figures!
  const above = c['oursMs']! - c['fsyncMs']!
  row(
    'commit, p50 over a bare fsync',
    above,
    'ms',
    'at most 30',
    above <= 30,
    `${short(c['oursMs']!)} ms and ${short(c['fsyncMs']!)} ms`,
  )
  for (const [skids, share] of [[1, 0.03], [100, 0.25]] as const) {
    const f = measure('live', skids, quick ? 10 : 60).figures!
    const smooth = skids === 1 || (f['late'] === 0 && f['loopP99Ms']! < 100)
    row(`live, ${skids} ${skids === 1 ? 'skid' : 'skids'}, no page`, 100 * f['share']!, '% of a core', `at most ${100 * share}${skids === 1 ? '' : ', no tick late, loop p99 under 100 ms'}`, f['share']! <= share && smooth && f['missing'] === 0, `${f['late']} late, slowest tick ${short(f['slowestMs']!)} ms, loop p99 ${short(f['loopP99Ms']!)} ms`)
  } // biome-ignore format: long lines of figures
  const b = measure('live-import', clean).figures!
  row(
    'live scan beside an import of a day',
    b['loopP99Ms']!,
    'ms of event-loop delay, p99',
    'no tick late, under 100',
    b['late'] === 0 && b['loopP99Ms']! < 100 && b['missing'] === 0,
    `${b['late']} of ${b['seconds']} ticks late, slowest tick ${short(b['slowestMs']!)} ms`,
  )
  const d = measure('derive').figures!
  row(
    'derive, a segment and scan',
    d['oursNs']!,
    'ns',
    'under 1000',
    d['oursNs']! < 1000,
    `${short(d['oursNs']! / d['bareNs']!)} x a bare Hagen-Poiseuille of ${short(d['bareNs']!)} ns`,
  )
}

const dir = mkdtempSync(join(tmpdir(), 'clearbore-bench-'))
try {
  all(dir)
} finally {
  rmSync(dir, { recursive: true, force: true })
}
const line = (cells: readonly string[]) => `| ${cells.join(' | ')} |\n`
process.stdout.write(line(['what', 'reached', 'to reach', 'verdict', 'figures']) + line(['---', '---', '---', '---', '---']))
for (const r of rowsTable)
  process.stdout.write(
    line([r.what, r.verdict === 'not measured' ? '' : `${short(r.value)} ${r.unit}`, r.target, r.verdict, r.detail]),
  )
const out = join(here, '..', 'bench.json')
writeFileSync(out, `${JSON.stringify({ node: process.version, quick, pairs, rows: rowsTable }, null, 1)}\n`)
process.stdout.write(`written to ${out}\n`)
process.exit(rowsTable.some((r) => r.verdict === 'missed') ? 1 : 0)
