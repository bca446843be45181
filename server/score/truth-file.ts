import { MonitorError } from '../core/errors.ts'
import type { Truth } from '../core/sim/truth.ts'

type Plain = { readonly [key: string]: unknown }
const isPlain = (v: unknown): v is Plain => typeof v === 'object' && v !== null && !Array.isArray(v)

/** What each list of the truth needs before it can be scored: times, texts, numbers. */
const needs: Readonly<Record<string, { times: readonly string[]; texts: readonly string[]; numbers: readonly string[] }>> = {
  phases: { times: ['from', 'to'], texts: ['phase'], numbers: [] },
  inControl: { times: ['from', 'to'], texts: [], numbers: [] },
  fouling: { times: ['onset', 'end', 'limitAt'], texts: ['segment', 'cause'], numbers: ['ratioAtOnset'] },
  exotherms: { times: ['start', 'end'], texts: ['segment', 'kind'], numbers: [] },
  feedErrors: { times: ['start', 'end'], texts: ['stream'], numbers: [] },
  sensorFaults: { times: ['start', 'end'], texts: ['tag', 'kind'], numbers: [] },
  confounders: { times: ['at'], texts: ['kind'], numbers: [] },
}

/**
 * Reads a truth.json, checking what the score uses. Lists that are absent are taken as empty.
 * Errors: SCORE_CASE with the file and the key that is wrong.
 */
export function readTruth(text: string, file: string): Truth {
  const fail = (what: string): never => {
    throw new MonitorError('SCORE_CASE', what, { place: { file }, hint: 'see the README for the form of truth.json' })
  }
  let raw: unknown
  try {
    raw = JSON.parse(text)
  } catch (cause) {
    throw new MonitorError('SCORE_CASE', `not JSON: ${cause instanceof Error ? cause.message : String(cause)}`, {
      place: { file },
      cause,
    })
  }
  if (!isPlain(raw)) return fail('expected an object')
  const time = (value: unknown, key: string) => {
    if (typeof value !== 'string' || Number.isNaN(Date.parse(value)))
      fail(`${key}: expected an RFC 3339 time, found ${JSON.stringify(value)}`)
  }
  const list = (value: unknown, key: string): readonly Plain[] => {
    if (value === undefined) return []
    if (!Array.isArray(value) || !value.every(isPlain)) return fail(`${key}: expected a list of objects`)
    return value
  }
  time(raw['from'], 'from')
  time(raw['to'], 'to')
  const lists: Record<string, readonly Plain[]> = {}
  for (const [key, need] of Object.entries(needs)) {
    const items = list(raw[key], key)
    items.forEach((item, i) => {
      const at = (k: string) => `${key}[${i}].${k}`
      for (const k of need.times) time(item[k], at(k))
      for (const k of need.texts)
        if (typeof item[k] !== 'string') fail(`${at(k)}: expected a text, found ${JSON.stringify(item[k])}`)
      for (const k of need.numbers)
        if (typeof item[k] !== 'number') fail(`${at(k)}: expected a number, found ${JSON.stringify(item[k])}`)
    })
    lists[key] = items
  }
  lists['fouling']!.forEach((f, i) => {
    const pairs = f['trajectory']
    if (!Array.isArray(pairs) || !pairs.every((p) => Array.isArray(p) && p.length === 2 && p.every((v) => typeof v === 'number')))
      fail(`fouling[${i}].trajectory: expected a list of [seconds, ratio]`)
    list(f['checkpoints'], `fouling[${i}].checkpoints`).forEach((c, k) => {
      time(c['at'], `fouling[${i}].checkpoints[${k}].at`)
      if (c['limitAtHeld'] != null) time(c['limitAtHeld'], `fouling[${i}].checkpoints[${k}].limitAtHeld`)
      if (typeof c['fraction'] !== 'number') fail(`fouling[${i}].checkpoints[${k}].fraction: expected a number`)
    })
  })
  const ratio = raw['ratio']
  if (!isPlain(ratio) || typeof ratio['everySeconds'] !== 'number' || !isPlain(ratio['segments']))
    return fail('ratio: expected everySeconds, start and segments')
  time(ratio['start'], 'ratio.start')
  for (const [id, values] of Object.entries(ratio['segments']))
    if (!Array.isArray(values) || !values.every((v) => typeof v === 'number'))
      fail(`ratio.segments.${id}: expected a list of numbers`)
  return {
    ...raw,
    ...lists,
    fouling: lists['fouling']!.map((f) => ({ ...f, checkpoints: f['checkpoints'] ?? [] })),
  } as unknown as Truth
}
