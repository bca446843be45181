import type { Comparison, RunDetail, RunRow } from '../../server/wire/index.ts'
import { getJson, said } from '../api.ts'
import { laidOver, standsOn } from '../model/compared.ts'
import { short } from '../model/format.ts'
import { el, say } from './dom.ts'

/** Chooses another run to be laid over the one shown, and what both begin at. */
export function overPicker(detail: RunDetail, runs: readonly RunRow[], changed: () => void) {
  let other: ReturnType<typeof laidOver> | null = null
  const which = el(
    'select',
    { id: 'board-other', 'aria-label': 'Run laid over it', on: { change: changed } },
    el('option', { value: '', text: 'no other run' }),
    ...runs
      .filter((r) => r.run !== detail.run)
      .slice(0, 200)
      .map((r) => el('option', { value: r.run, text: `over it: run ${r.run}, ${short(r.title, 30)}` })),
  )
  const by = el(
    'select',
    { id: 'board-by', hidden: true, 'aria-label': 'Laid over each other by', on: { change: changed } },
    el('option', { value: 'feed-on', text: 'from feed-on' }),
    el('option', { value: 'baseline', text: 'from its last baseline' }),
  )
  const stands = el('p', { class: 'soft' })
  return {
    choices: [which, by] as const,
    /** On what both stand: baselines and versions. */
    stands,
    other: () => other,
    /** Fetches the chosen run in a segment, or takes it away; gives why it cannot be laid over, empty when it can. */
    async choose(segment: string): Promise<string> {
      other = null
      say(stands, '')
      by.hidden = which.value === ''
      if (which.value === '') return ''
      const query = new URLSearchParams({ runs: `${detail.run},${which.value}`, segment, by: by.value, buckets: '1000' })
      try {
        const [here, there] = (await getJson<Comparison>(`/api/comparison?${query}`)).runs
        if (here === undefined || there === undefined) return ''
        other = laidOver(here, there)
        say(stands, `${standsOn(here)}; ${standsOn(there)}`)
        return ''
      } catch (error) {
        return said(error)
      }
    },
  }
}
