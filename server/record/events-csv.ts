import type { Act } from '../core/sequence.ts'
import { csvLine } from './csv-cell.ts'
import { iso, isoOrNull } from './facts.ts'

const columns = ['time', 'kind', 'value', 'unit', 'person', 'note', 'of', 'taken', 'recorded'] as const

/**
 * What people entered on a run, a line each: results, changes of drum and filter, comments. `time` is that of the entry, `taken` that of the sample,
 * `recorded` says whether it stands in the sequence or was entered after the run had ended. Reads back with `--events`.
 */
export function* eventsCsv(acts: readonly { readonly seq: number | null; readonly act: Act }[]): Generator<string> {
  yield csvLine(columns)
  for (const { seq, act } of acts) {
    const recorded = seq === null ? 'after the end' : 'in the run'
    if (act.kind === 'event')
      yield csvLine([
        ...[iso(act.tMs), act.event, act.value, act.unit, act.person, act.note, act.of ?? null],
        ...[isoOrNull(act.atMs ?? null), recorded],
      ])
    else if (act.kind === 'comment' && act.alarm === null)
      yield csvLine([iso(act.tMs), 'comment', null, null, act.person, act.text, null, null, recorded])
  }
}
