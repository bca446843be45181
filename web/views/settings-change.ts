import type { SettingValue } from '../../server/core/settings/flat.ts'
import type { OpenSetting, RunDetail, SettingsPage, SettingsSent } from '../../server/wire/index.ts'
import { postJson } from '../api.ts'
import { fromLocal, toLocal } from '../model/alarm-figures.ts'
import type { ZoneClock } from '../model/clock.ts'
import { kindOf, pathText, readSetting, settingText } from '../model/settings.ts'
import { el, fill, say } from './dom.ts'
import { fieldOf, formOf } from './form.ts'

/** One setting changed, with its old value beside it, a reason, and from when on. */
export function settingsChange(detail: RunDetail, clock: ZoneClock, url: string, done: () => void) {
  const group = el('select', { id: 'group' })
  const setting = el('select', { id: 'setting' })
  const old = el('output', { id: 'old' })
  const value = el('span', { class: 'value' })
  const reason = el('input', { type: 'text', id: 'change-reason', maxlength: 500, autocomplete: 'off' })
  const at = el('input', { type: 'text', id: 'effective', placeholder: 'at once', autocomplete: 'off' })
  let open: readonly OpenSetting[] = []
  let version = 0

  const chosen = (): OpenSetting | undefined => open.find((s) => s.path === setting.value)
  const typed = (): string => node.querySelector<HTMLInputElement | HTMLSelectElement>('#new-value')?.value ?? ''

  function settingsOf(): void {
    const was = setting.value
    const mine = open.filter((s) => s.group === group.value)
    fill(setting, ...mine.map((s) => el('option', { value: s.path, text: s.name })))
    if (mine.some((s) => s.path === was)) setting.value = was
    one()
  }
  function one(): void {
    const s = chosen()
    say(old, s === undefined ? '' : settingText(s.value, s.unit))
    const isBaseline = s?.path.endsWith('.baselineVersion') === true
    const kind = s === undefined ? { kind: 'text' as const } : kindOf(s)
    const input =
      kind.kind === 'words'
        ? el(
            'select',
            { id: 'new-value' },
            el('option', { value: '', text: 'not set' }),
            ...kind.words.map((w) => el('option', { value: w, text: w })),
          )
        : el('input', {
            type: 'text',
            id: 'new-value',
            maxlength: 2000,
            autocomplete: 'off',
            inputmode: kind.kind === 'number' ? 'decimal' : null,
          })
    if (isBaseline) (input as HTMLInputElement).value = String(version + 1)
    fill(value, input, el('span', { class: 'soft', text: s?.unit ?? '' }))
    say(valueLabel, isBaseline ? 'Learnt anew by version' : 'New value')
  }
  group.addEventListener('change', settingsOf)
  setting.addEventListener('change', one)

  const valueLabel = el('label', { for: 'new-value', text: 'New value' })
  const node = formOf(
    { id: 'change-setting', title: 'Change a setting', send: 'Put into force' },
    async () => {
      const s = chosen()
      if (s === undefined) return 'Choose a setting.'
      const read = readSetting(kindOf(s), typed())
      if (typeof read === 'string') return `Not done: ${read}`
      const text = at.value.trim()
      const effectiveMs = text === '' ? null : fromLocal(text, clock.offsetMs)
      if (text !== '' && effectiveMs === null) return 'Not done: no time of the kind 2031-01-14 03:12 – leave it empty for at once'
      const sent: SettingsSent = { reason: reason.value, effectiveMs, changes: [{ path: s.path, new: read.value as SettingValue }] }
      await postJson(url, sent)
      reason.value = at.value = ''
      done()
      return `Done: ${pathText(s.path)} ${settingText(s.value, s.unit)} → ${settingText(read.value, s.unit)}${effectiveMs === null ? '' : `, from ${clock.full(effectiveMs)}`}.`
    },
    fieldOf('What of', group),
    fieldOf('Setting', setting),
    el('p', { class: 'field' }, el('label', { for: 'old', text: 'Now' }), old),
    el('p', { class: 'field' }, valueLabel, value),
    fieldOf(
      'From',
      at,
      `Empty: at once. Else a later time, ${detail.skidFacts.timeZone}, such as ${toLocal((detail.toMs ?? 0) + 3_600_000, clock.offsetMs)}.`,
    ),
    fieldOf('Why', reason, 'At least 5 characters; it stands in the record with your name.'),
  )
  return {
    node,
    show(page: SettingsPage): void {
      open = page.settings
      version = page.versions.length
      const groups = [...new Set(open.map((s) => s.group))]
      const was = group.value
      fill(group, ...groups.map((g) => el('option', { value: g, text: g })))
      if (groups.includes(was)) group.value = was
      settingsOf()
    },
  }
}
