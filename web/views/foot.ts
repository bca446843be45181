import type { AlarmRow } from '../../server/wire/index.ts'
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
  return {
    node,
    show(alarms: readonly AlarmRow[]): void {
      const c = countsOf(alarms)
      const k = JSON.stringify(c)
      if (k === key) return
      key = k
      fill(
        counts,
        ...(['high', 'medium', 'low'] as const).map((p) =>
          el(
            'li',
            {},
            markView(p, c[p].n === 0 ? 'quiet' : c[p].unack > 0 ? 'unack' : 'ack'),
            el('span', {}, el('b', { text: String(c[p].n) }), c[p].unack > 0 ? `, ${c[p].unack} unack` : ''),
          ),
        ),
        el('li', {}, el('span', {}, el('b', { text: String(c.shelved) }), ' shelved')),
        el('li', {}, el('span', { class: 'tag', title: 'Alarms of this page are seen, not heard', text: 'NO SOUND' })),
      )
    },
  }
}
