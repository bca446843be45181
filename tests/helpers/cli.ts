import type { Io } from '../../server/cli/command.ts'
import { runCli } from '../../server/cli/run.ts'

export interface Said {
  readonly code: number
  readonly out: string
  readonly err: string
}

/** Runs the command line as a process would, with what it writes caught; its clock moves 0.3 s each time it is asked. */
export async function cli(args: readonly string[], { terminal = false } = {}): Promise<Said> {
  const said = { out: '', err: '' }
  let clock = 0
  const io: Io = {
    out: async (text) => {
      said.out += text
    },
    err: (text) => {
      said.err += text
    },
    errIsTerminal: terminal,
    outIsTerminal: false,
    nowMs: () => (clock += 300),
    signal: new AbortController().signal,
  }
  return { code: await runCli(args, io), ...said }
}

/** A skid of one segment between two taps, small enough to write its logs by hand: tags FT-1, PT-1, PT-2, TT-1 and a phase. */
export const benchSkid = `skid: bench
title: Bench
timeZone: UTC
scanSeconds: 1
phaseColumn: phase
tags:
  - { tag: FT-1, quantity: massFlow, unit: kg/h, range: [0, 20] }
  - { tag: PT-1, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: PT-2, quantity: pressure, unit: bar, range: [0, 25] }
  - { tag: TT-1, quantity: temperature, unit: degC, range: [-100, 200] }
streams:
  - { id: A, title: feed, flowTag: FT-1, fluid: { solvent: THF } }
segments:
  - { id: S1, title: tube, kind: tubing, streams: [A], pressureIn: PT-1, pressureOut: PT-2, temperatures: [TT-1],
      channel: { diameterMm: 1.5, lengthM: 8 }, limits: { dpHighBar: 4 } }
`
export const benchHeader = 'time,FT-1,PT-1,PT-2,TT-1,phase\n'
export const benchStartMs = Date.UTC(2031, 4, 5, 18)

/**
 * Rows of a bench run, one a second: 6 kg/h, 2.1 to 2.3 bar between the taps, readings that move a little; steady, but for `riseBar`
 * by which the first tap rises each second after the first 20 minutes.
 */
export function benchRows(
  n: number,
  from = 0,
  stamp = (i: number): string => new Date(benchStartMs + 1000 * i).toISOString(),
  riseBar = 0,
): string {
  let text = ''
  for (let i = from; i < from + n; i++) {
    const wave = Math.sin(i) + Math.sin(1.7 * i)
    text += `${stamp(i)},${(6 + 0.01 * wave).toFixed(3)},${(7.2 + 0.02 * wave + riseBar * Math.max(0, i - 1200)).toFixed(3)},${(5 - 0.01 * wave).toFixed(3)},${(-20 + 0.05 * wave).toFixed(2)},production\n`
  }
  return text
}
