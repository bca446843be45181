import type { AlarmStateName } from '../../server/core/alarms/alarm-state.ts'
import type { Priority } from '../../server/core/report.ts'
import { svg } from './dom.ts'

export type MarkLook = 'unack' | 'ack' | 'returned' | 'latched' | 'quiet'

const bodies = {
  high: 'M10 1H75V29H10L1 24.3L10 19.7L1 15L10 10.3L1 5.7Z',
  med: 'M10 1H75V29H10L1 22L10 15L1 8Z',
  low: 'M10 1H75V29H10L1 15Z',
}
const looks: Record<MarkLook, string> = { unack: 'open', ack: '', returned: 'gone open', latched: 'gone', quiet: 'quiet' }
export const shortOf = (p: Priority): 'high' | 'med' | 'low' => (p === 'medium' ? 'med' : p)

/** How an alarm's state looks: filled while the condition is there, hollow when gone, framed until somebody owns it, broken when put aside. */
export const lookOf = (state: AlarmStateName): MarkLook =>
  state === 'UNACK'
    ? 'unack'
    : state === 'ACKED'
      ? 'ack'
      : state === 'RTNUN' || state === 'LUNACK'
        ? 'returned'
        : state === 'LACKED'
          ? 'latched'
          : 'quiet'

/** State as a word; the mark never says it alone. */
export const stateWord: Record<AlarmStateName, string> = {
  NORM: 'OVER',
  UNACK: 'UNACK',
  ACKED: 'ACK',
  RTNUN: 'RETURNED',
  LUNACK: 'LATCHED',
  LACKED: 'LATCHED, RESET',
  SHELVED: 'SHELVED',
  SBD: 'SUPPRESSED',
  OOS: 'OUT OF SERVICE',
}

/** The alarm mark: teeth 3, 2, 1, the word and the colour say the priority. */
export function markView(priority: Priority, look: MarkLook): SVGElement {
  const p = shortOf(priority)
  const text = svg('text', { x: 43, y: 21.2 })
  text.textContent = p === 'high' ? 'HIGH' : p === 'med' ? 'MED' : 'LOW'
  return svg(
    'svg',
    { class: `mark ${p} ${looks[look]}`.trim(), viewBox: '0 0 76 30', role: 'img', 'aria-label': `${priority} priority` },
    svg('path', { class: 'frame', d: 'M-4.5 -4.5H80.5V34.5H-4.5Z' }),
    svg('path', { class: 'body', d: bodies[p] }),
    text,
  )
}
