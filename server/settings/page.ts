import { disturbances } from '../core/bank/model.ts'
import { alarmKinds } from '../core/report.ts'
import { type LimitName, limitNames } from '../core/sequence.ts'
import { diff, type FlatSettings, flatten, type SettingChange } from '../core/settings/flat.ts'
import { settingOf } from '../core/settings/slots.ts'
import { settingUnit } from '../core/settings/words.ts'
import type { Skid } from '../core/skid.ts'
import type { Engine } from '../monitor/engine.ts'
import type { OpenSetting, SettingRow, SettingsComparison, SettingsPage, VersionRow } from '../wire/settings.ts'
import type { StoredVersion, Versions } from './versions.ts'

const limitWords: Readonly<Record<LimitName, string>> = {
  dpHighBar: 'pressure drop, high',
  dpHighHighBar: 'pressure drop, high-high',
  pressureHighBar: 'inlet pressure, high',
  temperatureHighC: 'temperature, high',
  temperatureHighHighC: 'temperature, high-high',
  temperatureLowC: 'temperature, low',
  flowLow: 'flow, low',
}
/** Fields of an alarm that act, and those that a person reads. */
const alarmFields = [
  'priority',
  'onDelaySeconds',
  'offDelaySeconds',
  'deadband',
  'latching',
  'timeToRespondSeconds',
  'cause',
  'consequence',
  'check',
  'action',
  'priorityReason',
  'approvedBy',
  'approvedOn',
  'version',
] as const

const fixed =
  'Tags, columns, streams, segments and geometry are of the skid file and hold for a whole run. Edit the file and start the server again: the file becomes a version of its own, the live run ends, a new one begins. A step test that was commissioned is taken up by a new run too.'

/** Every setting that may change within a run, as it stands in a configuration. */
export function openSettings(skid: Skid): OpenSetting[] {
  const out: OpenSetting[] = []
  const put = (group: string, path: string, name: string): void => {
    out.push({ path, unit: settingUnit(skid, path), value: settingOf(skid, path), group, name })
  }
  for (const s of skid.segments) {
    const group = `Limits of ${s.id}`
    for (const name of limitNames) put(group, `segments.${s.id}.limits.${name}`, limitWords[name])
    if (s.limits.feedRatio !== null)
      for (const side of ['low', 'high'] as const)
        put(group, `segments.${s.id}.limits.feedRatio.${side}`, `feed ratio ${s.limits.feedRatio.of.join(' to ')}, ${side}`)
  }
  put('Promise', 'detection.falseAlarmDays', 'one false alarm in')
  put('Promise', 'detection.riseToFindPct', 'rise to be found')
  for (const s of skid.streams) {
    put('Feeds', `streams.${s.id}.waterPpm`, `water in ${s.id}`)
    if (s.reagent !== null) put('Feeds', `streams.${s.id}.reagent.concentrationMolL`, `${s.reagent.name} in ${s.id}`)
  }
  for (const key of new Set([...alarmKinds, ...Object.keys(skid.alarms)]))
    for (const field of alarmFields) put(`Alarm ${key}`, `alarms.${key}.${field}`, field)
  for (const name of Object.keys(skid.suppression ?? {}))
    for (const part of ['alarms', 'phases'] as const) put('Suppression', `suppression.${name}.${part}`, `${name}, ${part}`)
  for (const s of skid.segments) put('Baselines', `segments.${s.id}.baselineVersion`, `baseline of ${s.id} learnt anew by version`)
  for (const name of Object.keys(disturbances)) put('Disturbances', `disturbances.${name}`, name)
  return out
}

const rows = (skid: Skid, changes: readonly SettingChange[]): SettingRow[] =>
  changes.map((c) => ({ path: c.path, unit: settingUnit(skid, c.path), old: c.old, new: c.new }))

export const versionRow = (skid: Skid, versions: Versions, v: StoredVersion): VersionRow => ({
  version: v.version,
  kind: v.kind,
  decidedMs: v.decidedMs,
  effectiveMs: v.effectiveMs,
  person: v.person,
  reason: v.reason,
  run: v.run,
  planned: v.kind === 'change' && !versions.tookEffect(v),
  changes: rows(skid, v.changes),
})

/** All that the settings page of a skid shows: of its live run as it stands, else as a run would begin now. */
export function settingsPage(versions: Versions, skidId: string, live: Engine | null, known: Skid): SettingsPage {
  const all = versions.list(skidId)
  const view = live?.pipeline.view()
  const latest = versions.inForce(skidId)
  const skid = view?.skid ?? (all.length === 0 ? known : versions.at(skidId, latest))
  return {
    skid: skidId,
    title: skid.title,
    run: live?.run ?? null,
    version: view?.configuration.applied.findLast((a) => a.version !== null)?.version ?? latest,
    versions: all.map((v) => versionRow(skid, versions, v)),
    settings: openSettings(skid),
    fixed,
  }
}

/** Names in `b` that `a` lacks, of tags, streams and segments. */
const more = (a: FlatSettings, b: FlatSettings): string[] =>
  (['tags', 'streams', 'segments'] as const).flatMap((what) => {
    const names = (of: FlatSettings): readonly (string | number)[] => (of[`${what}.order`] as readonly string[] | undefined) ?? []
    return names(b).flatMap((n) => (names(a).includes(n) ? [] : [`${what.slice(0, -1)} ${n}`]))
  })

/** Two versions beside each other. Errors: SETTINGS_UNKNOWN. */
export function comparison(versions: Versions, skidId: string, from: number, to: number): SettingsComparison {
  const [a, b] = [versions.at(skidId, from), versions.at(skidId, to)]
  const [flatA, flatB] = [flatten(a), flatten(b)]
  return { from, to, changes: rows(b, diff(flatA, flatB)), added: more(flatA, flatB), removed: more(flatB, flatA) }
}
