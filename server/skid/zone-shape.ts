import { nearest } from './nearest.ts'
import { text } from './readers.ts'

const isZone = (name: string): boolean => {
  if (!/^[A-Za-z]/.test(name)) return false
  try {
    return new Intl.DateTimeFormat('en', { timeZone: name }).resolvedOptions().timeZone !== ''
  } catch {
    return false
  }
}

/** An IANA time zone that this machine knows. An offset such as +01:00 is refused: it knows no summer time. */
export const zoneShape = text('an IANA time zone such as Europe/Amsterdam or UTC', (value) => {
  if (isZone(value)) return null
  const zones = Intl.supportedValuesOf('timeZone')
  const place = value.split('/').at(-1) ?? ''
  const byPlace =
    place === ''
      ? undefined
      : zones.find((zone) => zone.split('/').at(-1)?.toLowerCase() === place.toLowerCase().replace(/\s+/g, '_'))
  const near = byPlace ?? nearest(value, zones)
  return { hint: near === null ? null : `did you mean '${near}'?` }
})
