import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { expect, it } from 'vitest'
import type { Io } from '../../server/cli/command.ts'
import { flushPlanCommand } from '../../server/cli/flush-plan.ts'
import { MonitorError } from '../../server/core/errors.ts'

const skid = fileURLToPath(new URL('../../fixtures/skids/heron.yaml', import.meta.url))
async function run(...args: string[]) {
  let out = ''
  const io: Io = {
    out: async (text) => {
      out += text
    },
    err: () => undefined,
    errIsTerminal: false,
    outIsTerminal: false,
    nowMs: () => 0,
    signal: new AbortController().signal,
  }
  try {
    return { code: await flushPlanCommand.run(args, io), out, error: null }
  } catch (error) {
    if (!(error instanceof MonitorError)) throw error
    return { code: null, out, error }
  }
}

it('prints the plan as a page of at most 120 columns and as JSON on stdout', async () => {
  const page = await run('--skid', skid, '--segment', 'R1', '--ratio', '1.5')
  expect(page.code).toBe(0)
  expect(page.out).toMatch(/^Flush plan for R1 .*: about \d+ min in all\n/)
  expect(Math.max(...page.out.split('\n').map((l) => l.length))).toBeLessThanOrEqual(120)
  const json = await run('--skid', skid, '--segment', 'R1', '--ratio', '1.5', '--json', '-')
  const plan = JSON.parse(json.out)
  expect(plan.steps.map((s: { id: string }) => s.id)).toEqual(['F0', 'F1', 'F2', 'F3', 'F4', 'F5', 'F6'])
  expect(plan.waterReference.find((w: { segment: string }) => w.segment === 'R1').ratio).toBe(1.5)
})

it('writes the JSON into a file beside the page, and takes several segments with their ratios', async () => {
  const folder = mkdtempSync(join(tmpdir(), 'flush-'))
  try {
    const file = join(folder, 'plan.json')
    const { code, out } = await run(
      '--skid',
      skid,
      '--segment',
      'R1',
      '--segment',
      'R2',
      '--ratio',
      '1.5',
      '--ratio',
      '1.2',
      '--json',
      file,
    )
    expect([code, out.startsWith('Flush plan for R1, R2')]).toEqual([0, true])
    const plan = JSON.parse(readFileSync(file, 'utf8'))
    expect(plan.waterReference.find((w: { segment: string }) => w.segment === 'R2').ratio).toBe(1.2)
  } finally {
    rmSync(folder, { recursive: true })
  }
})

it('names the nearest segment for a wrong one, and calls a wrong command line wrong', async () => {
  expect((await run('--skid', skid, '--segment', 'R11')).error?.line()).toMatch(
    /no segment 'R11' in this skid; did you mean 'R1'\?/,
  )
  for (const args of [
    [],
    ['--skid', skid],
    ['--skid', skid, '--segment', 'R1', '--ratio', '0.2'],
    ['--skid', skid, '--segment', 'R1', '--ratio', 'x'],
    ['--skid', skid, '--segment', 'R1', '--flux'],
    ['--skid', skid, '--segment', 'R1', '--ratio', '2', '--ratio', '2'],
  ]) {
    expect((await run(...args)).error?.code).toBe('USAGE')
  }
})

it('refuses a solvent that does not mix with water', async () => {
  expect((await run('--skid', skid, '--segment', 'R1', '--solvent', 'toluene')).error?.code).toBe('FLUSH_REFUSED')
})

// PRO-10
it('ends with what may come next by the stored checks: F0 first, water refused until F1 and F2 are met by a person on good readings', async () => {
  const plan = JSON.parse((await run('--skid', skid, '--segment', 'R1', '--json', '-')).out)
  expect(plan.next.step).toBe('F0')
  expect(plan.next.refused[0].step).toBe('F3')
  const folder = mkdtempSync(join(tmpdir(), 'flush-checks-'))
  const file = join(folder, 'checks.yaml')
  type Step = { id: string; criteria: { id: string }[] }
  const check = (step: string, criterion: string, more = 'verdict: met, value: seen, quality: good') =>
    `  - { step: ${step}, criterion: ${criterion}, ${more}, source: panel, person: M. Ovalle, time: 2031-05-05T21:40:00+02:00 }`
  const all = (...ids: string[]) =>
    (plan.steps as Step[]).filter((s) => ids.includes(s.id)).flatMap((s) => s.criteria.map((c) => check(s.id, c.id)))
  const next = async (lines: string[]) => {
    writeFileSync(file, `checks:\n${lines.join('\n')}\n`)
    return JSON.parse((await run('--skid', skid, '--segment', 'R1', '--checks', file, '--json', '-')).out).next
  }
  try {
    expect((await next(all('F0', 'F1'))).step).toBe('F2')
    expect((await next(all('F0', 'F2', 'F3'))).step).toBe('F1')
    expect(await next(all('F0', 'F1', 'F2'))).toMatchObject({ step: 'F3', refused: [] })
    const doubtful = [...all('F0', 'F1', 'F2'), check('F1', 'volume', 'verdict: met, value: 200 mL, quality: uncertain')]
    expect(await next(doubtful)).toMatchObject({
      step: 'F1',
      waitingFor: [{ criterion: 'volume', why: 'value of uncertain quality' }],
    })
    const skipped = [
      ...all('F0', 'F2'),
      check('F1', 'volume', 'verdict: skipped, value: none, quality: good, reason: no time left tonight'),
    ]
    expect((await next(skipped)).waitingFor[0].why).toBe('cannot be skipped')
    writeFileSync(file, `checks:\n${check('F1', 'volum')}\n`)
    const wrong = await run('--skid', skid, '--segment', 'R1', '--checks', file)
    expect(wrong.error?.line()).toMatch(/checks\.yaml:2:\d+: F1 has no criterion 'volum'; .*did you mean 'volume'/)
    const page = await run('--skid', skid, '--segment', 'R1')
    expect(page.out).toMatch(/Next by the checks stored: F0\n/)
  } finally {
    rmSync(folder, { recursive: true })
  }
})
