import type { Report, SettingReport } from '../core/report.ts'

const text = (v: SettingReport['new'], unit: string | null): string =>
  v === null ? 'not set' : `${Array.isArray(v) ? v.join(', ') : String(v)}${unit === null ? '' : ` ${unit}`}`

/** What was changed in a run's settings and entered by hand, a line for each, old → new with who and why; empty for a run on its skid file alone. */
export const settingsLines = (report: Report, at: (iso: string) => string): string[] =>
  report.run.configuration
    .filter((c) => c.changes.length > 0)
    .map(({ version, from, person, reason, changes }) => {
      const what = changes.map((c) => `${c.path} ${text(c.old, c.unit)} → ${text(c.new, c.unit)}`).join('; ')
      const who = [person, reason].filter((x) => x !== '').join(': ')
      return `${from === null ? 'from the start' : at(from)}  ${version === null ? 'entered' : `version ${version}`}  ${what} (${who})`
    })
