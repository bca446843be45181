import type { AlarmRecord } from '../core/alarms/alarm-state.ts'
import type { BaselineRecord } from '../core/fouling/watch-state.ts'
import { barFromPa } from '../core/units.ts'
import type { AlarmTransition } from '../store/journal.ts'
import type { Json } from '../store/keys.ts'
import type { Marks } from '../wire/trend.ts'

/** A baseline as pages get it. */
export type Baseline = Omit<Marks['baselines'][number], 'segment'>
export const baselineOf = (b: BaselineRecord): Baseline => ({
  fromMs: b.fromMs,
  toMs: b.toMs,
  dpBar: barFromPa(b.dpPa),
  sigma: b.sigma,
  provisional: b.provisional,
})

/** The record whole in `more`; its main fields beside it for readers of the database. */
export const storedTransition = (r: AlarmRecord): AlarmTransition => ({
  alarm: r.alarm ?? 0,
  tMs: r.tMs,
  from: r.from,
  to: r.to,
  input: r.input,
  person: r.person,
  reason: r.reason,
  value: r.value,
  more: r as unknown as Json,
})
