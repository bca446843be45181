import type { AlarmRow, RunRow } from '../../server/wire/index.ts'
import { countsOf } from '../model/alarm-list.ts'
import { el, fill } from './dom.ts'
import { markView } from './mark.ts'

const caution =
  'Clearbore moves nothing on the skid and is no safety function. It can be wrong: site procedures and authorised people decide.'

/** The foot of every page: the standing caution and how many alarms stand. Never scrolled away. */
export function footView() {
  const counts = el('ul', { class: 'counts', 'aria-label': 'Alarms standing' })
  const node = el('footer', { class: 'foot' }, el('p', { class: 'caution' }, el('b', { text: 'Advisory only. ' }), caution), counts)
  let key = ''
  const draw = (c: Counts, unack: number | null, live: boolean): void => {
    const k = JSON.stringify([c, unack, live])
    if (k === key) return
    key = k
    fill(
      counts,
      live ? el('li', { class: 'soft', text: 'live now' }) : null,
      ...(['high', 'medium', 'low'] as const).map((p) =>
        el(
          'li',
          {},
          markView(
            p,
            c[p].n === 0
              ? 'quiet'
              : c[p].active === 0
                ? c[p].unack > 0
                  ? 'returned'
                  : 'latched'
                : c[p].unack > 0
                  ? 'unack'
                  : 'ack',
          ),
          el('span', {}, el('b', { text: String(c[p].n) }), c[p].unack > 0 ? `, ${c[p].unack} unack` : ''),
        ),
      ),
      unack === null
        ? el('li', {}, el('span', {}, el('b', { text: String(c.shelved) }), ' shelved'))
        : el('li', {}, el('span', {}, el('b', { text: String(unack) }), ' unack')),
      el('li', {}, el('span', { class: 'tag', title: 'Alarms of this page are seen, not heard', text: 'NO SOUND' })),
    )
  }
  return {
    node,
    show: (alarms: readonly AlarmRow[]): void => draw(countsOf(alarms), null, false),
    /** On pages that are not live: what stands on the live skids, so that a replay hides no alarm. */
    live(runs: readonly RunRow[]): void {
      const on = runs.filter((r) => r.state === 'live')
      const sum = (p: 'high' | 'medium' | 'low' | 'unacknowledged') => on.reduce((n, r) => n + r.alarms[p], 0)
      const none = (n: number) => ({ n, unack: 0, active: n })
      draw(
        { high: none(sum('high')), medium: none(sum('medium')), low: none(sum('low')), shelved: 0, outOfService: 0 },
        sum('unacknowledged'),
        true,
      )
    },
  }
}
type Counts = ReturnType<typeof countsOf>
