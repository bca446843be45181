import type { AlarmRow } from '../../server/wire/index.ts'
import { countsOf } from '../model/alarm-list.ts'
import { el, fill } from './dom.ts'
import { markView } from './mark.ts'

const caution =
  'Clearbore moves nothing on the skid and is no safety function. It can be wrong: site procedures and authorised people decide.'

/** The foot of every page: the standing caution, how many alarms stand and are put aside, and whether they are heard. Never scrolled away. */
export function footView(sound: HTMLElement) {
  const counts = el('ul', { class: 'counts', 'aria-label': 'Alarms standing' })
  const node = el(
    'footer',
    { class: 'foot' },
    el('p', { class: 'caution' }, el('b', { text: 'Advisory only. ' }), caution),
    counts,
    sound,
  )
  let key = ''
  const number = (n: number, word: string, always: boolean) =>
    n === 0 && !always ? null : el('li', {}, el('span', {}, el('b', { text: String(n) }), ` ${word}`))
  return {
    node,
    /** Alarms of every live run; `here`: on the page of the one that is watched, so that a replay hides no alarm and says whose they are. */
    show(alarms: readonly AlarmRow[], here: boolean): void {
      const c = countsOf(alarms)
      const k = JSON.stringify([c, here])
      if (k === key) return
      key = k
      fill(
        counts,
        here ? null : el('li', { class: 'soft', text: 'live now' }),
        ...(['high', 'medium', 'low'] as const).map((p) =>
          el(
            'li',
            {},
            markView(p, lookOfMany(c[p])),
            el('span', {}, el('b', { text: String(c[p].n) }), c[p].unack > 0 ? `, ${c[p].unack} unack` : ''),
          ),
        ),
        number(c.shelved, 'shelved', true),
        number(c.suppressed, 'suppressed', false),
        number(c.outOfService, 'out of service', false),
      )
    },
  }
}

const lookOfMany = ({ n, active, unack }: { n: number; active: number; unack: number }) =>
  n === 0 ? 'quiet' : active === 0 ? (unack > 0 ? 'returned' : 'latched') : unack > 0 ? 'unack' : 'ack'
