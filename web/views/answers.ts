import type { Answer, Answers } from '../model/answers.ts'
import { el, fill, say } from './dom.ts'
import { lookOf, markView } from './mark.ts'

const questions = ['Where', 'How bad', 'How long'] as const

/** Three of the four answers, large enough for three metres; the fourth, what now, stands on the other side: `nowView`. */
export function answersView() {
  const parts = questions.map((q) => answerView(q))
  const node = el('dl', { class: 'answers' }, ...parts.map((p) => p.node))
  return {
    node,
    show(a: Answers): void {
      parts[0]!.show(
        a.where,
        a.alarm === null ? null : markView(a.alarm.priority, lookOf(a.alarm.state)),
        a.alarm === null ? '' : `${a.alarm.id} ${a.alarm.state}`,
      )
      parts[1]!.show(a.howBad)
      parts[2]!.show(a.howLong)
      node.dataset['segment'] = a.segment ?? ''
    },
  }
}

function answerView(question: string) {
  const far = el('p', { class: 'far' })
  const below = el('p', { class: 'd' })
  const node = el('div', { class: 'answer' }, el('dt', { text: question }), el('dd', {}, far, below))
  let key = ''
  return {
    node,
    show(a: Answer, mark: Node | null = null, markKey = ''): void {
      const k = `${a.far}|${a.unit}|${a.to}|${markKey}`
      if (k !== key) {
        key = k
        fill(
          far,
          el('span', { class: 'val', text: a.far }),
          a.unit === null ? null : el('small', { text: a.unit }),
          a.to === null ? null : el('small', { text: 'to' }),
          a.to === null ? null : el('span', { class: 'val', text: a.to }),
          mark,
        )
        const n = a.far.length + (a.to?.length ?? 0)
        far.classList.toggle('long', n > 12)
        far.classList.toggle('longer', n > 16 && n <= 20)
        far.classList.toggle('longest', n > 20)
      }
      say(below, a.below)
    },
  }
}

export function nowView() {
  const far = el('p', { class: 'far' })
  const below = el('p', { class: 'd' })
  const node = el('div', { class: 'answer now' }, el('p', { class: 'q', text: 'What now' }), far, below)
  return {
    node,
    show(a: Answer): void {
      say(far, a.far)
      far.classList.toggle('long', a.far.length > 13)
      say(below, a.below)
    },
  }
}
