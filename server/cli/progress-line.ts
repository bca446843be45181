import type { Io } from './command.ts'

const clock = (s: number): string =>
  s < 90 ? `${Math.round(s)} s` : s < 5400 ? `${Math.round(s / 60)} min` : `${(s / 3600).toFixed(1)} h`

/**
 * One line on stderr that overwrites itself, at most four times a second and only on a terminal: share done, rate, time left.
 * Call with how much is done; `end` clears the line.
 */
export function progressLine(io: Io, label: string, total: number, unit: string) {
  const start = io.nowMs()
  let shown = Number.NEGATIVE_INFINITY
  let width = 0
  const put = (text: string) => {
    io.err(`\r${text.padEnd(width)}`)
    width = text.length
  }
  return {
    update(done: number, what = ''): void {
      const now = io.nowMs()
      if (!io.errIsTerminal || now - shown < 250) return
      shown = now
      const seconds = (now - start) / 1000
      const pace =
        done > 0 && seconds > 0
          ? `, ${Number((done / seconds).toPrecision(3))} ${unit}/s, ${clock(((total - done) * seconds) / done)} left`
          : ''
      put(
        `${label} ${total > 0 ? Math.floor((100 * done) / total) : 0} % (${done} of ${total} ${unit}${pace})${what === '' ? '' : ` ${what}`}`,
      )
    },
    end(): void {
      if (width > 0) io.err(`\r${' '.repeat(width)}\r`)
      width = 0
    },
  }
}
