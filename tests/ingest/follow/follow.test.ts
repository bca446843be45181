import { renameSync, rmSync, truncateSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { header, line, logger, startMs } from './logger.ts'

const numbers = (from: number, to: number): number[] => Array.from({ length: to - from }, (_, i) => from + i + 0.5)

describe('a log that grows', () => {
  it('waits for a file that is not there yet, and tells so', async () => {
    const l = logger()
    await l.poll()
    expect(l.status()).toMatchObject({ state: 'waiting', message: expect.stringContaining('no such file yet') })
    l.write(header + line(0))
    await l.poll()
    expect([l.rows.map((r) => r.value), l.status().state]).toEqual([[0.5], 'running'])
    await l.close()
  })

  it('takes a line once its end is written: half a number is no number', async () => {
    const l = logger()
    l.write(header + line(0) + line(1).slice(0, 27))
    await l.poll()
    expect(l.rows.map((r) => r.value)).toEqual([0.5])
    l.append(line(1).slice(27))
    await l.poll()
    expect(l.rows.map((r) => r.value)).toEqual([0.5, 1.5])
    await l.close()
  })

  it('written in random pieces with restarts and lost commits between, gives every row once, in order, words included', async () => {
    const text = header + Array.from({ length: 40 }, (_, i) => line(i, ['open', 'shut', 'half'][i % 3])).join('')
    await fc.assert(
      fc.asyncProperty(
        fc.array(fc.tuple(fc.nat(text.length), fc.constantFrom('poll', 'restart', 'lost')), { maxLength: 12 }),
        async (cuts) => {
          const l = logger()
          l.write('')
          let done = 0
          for (const [upTo, then] of [...cuts.sort((a, b) => a[0] - b[0]), [text.length, 'poll'] as const]) {
            l.append(text.slice(done, upTo))
            done = upTo
            if (then === 'lost') {
              await l.lostPoll()
              await l.restart()
            } else await l.poll()
            if (then === 'restart') await l.restart()
          }
          await l.poll()
          await l.close()
          expect(l.rows).toEqual(
            Array.from({ length: 40 }, (_, i) => ({
              tMs: startMs + 1000 * i,
              value: i + 0.5,
              word: ['open', 'shut', 'half'][i % 3],
            })),
          )
        },
      ),
      { numRuns: 40, seed: 7 },
    )
  })
})

describe('rotation and truncation', () => {
  it('reads a renamed log to its end before the new one, while running', async () => {
    const l = logger()
    l.write(header + line(0))
    await l.poll()
    l.append(line(1))
    renameSync(l.path, `${l.path}.1`)
    l.write(header + line(2))
    await l.poll()
    await l.poll()
    expect(l.rows.map((r) => r.value)).toEqual(numbers(0, 3))
    expect(l.status().message).toContain('rotated')
    await l.close()
  })

  it('finds what was written to a log that was renamed while the process was down', async () => {
    const l = logger()
    l.write(header + line(0))
    await l.poll()
    await l.close()
    l.append(line(1))
    renameSync(l.path, join(l.dir, 'log-2031-05-05.csv'))
    l.write(header + line(2) + line(3))
    await l.restart()
    await l.poll()
    await l.poll()
    expect(l.rows.map((r) => r.value)).toEqual(numbers(0, 4))
    await l.close()
  })

  it('leaves out a line of the old log that was never finished, and says how many bytes', async () => {
    const l = logger()
    l.write(header + line(0) + line(1).slice(0, 27))
    await l.poll()
    renameSync(l.path, `${l.path}.1`)
    l.write(header + line(2))
    await l.poll()
    await l.poll()
    expect(l.rows.map((r) => r.value)).toEqual([0.5, 2.5])
    expect(l.status().message).toContain('27 bytes of a line that was never finished')
    await l.close()
  })

  it('begins anew after a truncation to less, and after one that has grown past the old place already', async () => {
    const l = logger()
    l.write(header + line(0) + line(1))
    await l.poll()
    truncateSync(l.path, 0)
    l.append(header + line(2))
    await l.poll()
    expect(l.rows.map((r) => r.value)).toEqual(numbers(0, 3))
    expect(l.status().message).toContain('begun anew')
    truncateSync(l.path, 0)
    l.append(header + [3, 4, 5, 6].map((i) => line(i)).join(''))
    await l.poll()
    expect(l.rows.map((r) => r.value)).toEqual(numbers(0, 7))
    await l.close()
  })

  it('survives a log that goes away for a while', async () => {
    const l = logger()
    l.write(header + line(0))
    await l.poll()
    rmSync(l.path)
    await l.poll()
    expect(l.status().state).toBe('waiting')
    l.write(header + line(1))
    await l.poll()
    await l.poll()
    expect(l.rows.map((r) => r.value)).toEqual(numbers(0, 2))
    await l.close()
  })
})

describe('mistakes of the log', () => {
  it('shows a header that fits no tag as a failed source with its place, and goes on once the log is replaced', async () => {
    const l = logger()
    l.write('when,pressure\n1,2\n3,4\n')
    await l.poll()
    expect(l.status()).toMatchObject({ state: 'failed', message: expect.stringMatching(/log\.csv:1/) })
    await l.poll()
    renameSync(l.path, `${l.path}.bad`)
    l.write(header + line(0))
    await l.poll()
    await l.poll()
    expect([l.rows.map((r) => r.value), l.status().state]).toEqual([[0.5], 'running'])
    await l.close()
  })

  it('keeps the rows before a line whose time changes its format, and fails at that line also after a restart', async () => {
    const l = logger()
    l.write(header + line(0))
    await l.poll()
    l.append(`${line(1)}05/05/2031 18:00:02,2.5,open\n${line(3)}`)
    await l.poll()
    expect([l.rows.map((r) => r.value), l.status().state]).toEqual([[0.5, 1.5], 'failed'])
    expect(l.status().message).toMatch(/log\.csv:4/)
    await l.restart()
    await l.poll()
    expect([l.rows.length, l.status().state]).toEqual([2, 'failed'])
    await l.close()
  })

  it('shows a folder in place of the log instead of falling over', async () => {
    const l = logger()
    writeFileSync(join(l.dir, 'x'), '')
    const { followSource } = await import('../../../server/ingest/follow.ts')
    const { skid } = await import('./logger.ts')
    const source = followSource({ skid, path: l.dir, startMs: null, wallMs: () => 0, steadyMs: () => 0, state: null, words: [] })
    expect((await source.poll()).entries).toEqual([])
    expect(source.status()).toMatchObject({ state: 'waiting', message: expect.stringContaining('cannot read') })
    await source.close()
  })
})

describe('the clock of a followed run', () => {
  it("is the logger's: newest row plus the time since it came, whatever the wall says, and goes on after a restart", async () => {
    const l = logger()
    l.write(header + line(0) + line(1))
    await l.poll()
    expect(l.clock()).toEqual({ kind: 'wall', nowMs: startMs + 1000, speed: 1 })
    l.pass(700)
    expect(l.clock().nowMs).toBe(startMs + 1700)
    await l.restart()
    expect(l.clock().nowMs).toBe(startMs + 1700)
    l.pass(60_000)
    expect(l.clock().nowMs).toBe(startMs + 61_700)
    await l.close()
  })

  it('ticks only once rows are missing for longer than this logger usually pauses: 10-s bursts bring no tick, a stop does', async () => {
    const l = logger()
    l.write(header)
    let i = 0
    for (let burst = 0; burst < 6; burst++) {
      for (let k = 0; k < 10; k++) l.append(line(i++))
      for (let s = 0; s < 10; s++) await l.poll(1000)
    }
    expect([l.rows.length, l.ticks]).toEqual([60, []])
    for (let s = 0; s < 40; s++) await l.poll(1000)
    expect(l.ticks.length).toBeGreaterThan(10)
    expect(l.ticks[0]).toBeGreaterThan(startMs + 59_000 + 20_000)
    expect(l.ticks.at(-1)).toBeLessThanOrEqual(startMs + 59_000 + 50_000)
    await l.close()
  })
})
