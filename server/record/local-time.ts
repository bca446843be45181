const formats = new Map<string, Intl.DateTimeFormat>()

/** A time in a zone with its offset, RFC 3339: `2031-05-05T20:00:00.000+02:00`. Both hours of a repeated hour differ by their offset. */
export function localIso(tMs: number, timeZone: string): string {
  let format = formats.get(timeZone)
  if (format === undefined) {
    format = new Intl.DateTimeFormat('en-US', {
      timeZone, hourCycle: 'h23', year: 'numeric', month: '2-digit', day: '2-digit', hour: '2-digit', minute: '2-digit', second: '2-digit',
    }) // biome-ignore format: a list
    formats.set(timeZone, format)
  }
  const part = Object.fromEntries(format.formatToParts(tMs).map((p) => [p.type, p.value]))
  const n = (type: string): number => Number(part[type])
  const wall = Date.UTC(n('year'), n('month') - 1, n('day'), n('hour'), n('minute'), n('second'))
  const offsetMin = Math.round((wall - Math.floor(tMs / 1000) * 1000) / 60_000)
  const pad = (v: number): string => String(Math.floor(v)).padStart(2, '0')
  const text = new Date(Math.floor(tMs) + offsetMin * 60_000).toISOString().slice(0, -1)
  return `${text}${offsetMin < 0 ? '-' : '+'}${pad(Math.abs(offsetMin) / 60)}:${pad(Math.abs(offsetMin) % 60)}`
}
