import { el, say } from './dom.ts'

/** Pages that are not needed at every glance, behind one word of the strip; it opens and closes by click, Enter and Escape, and says where one is. */
export function moreView(items: readonly HTMLLIElement[]) {
  const summary = el('summary', { text: 'More' })
  const node = el('details', { class: 'more' }, summary, el('ul', {}, ...items))
  const shut = () => {
    node.open = false
  }
  node.addEventListener('keydown', (event) => {
    if (event.key !== 'Escape' || !node.open) return
    shut()
    summary.focus()
  })
  node.addEventListener('focusout', (event) => {
    if (!(event.relatedTarget instanceof Node && node.contains(event.relatedTarget))) shut()
  })
  node.addEventListener('click', (event) => {
    if (event.target instanceof HTMLAnchorElement) shut()
  })
  return {
    node,
    /** The page that is shown, where it is one of these. */
    show(name: string | null): void {
      say(summary, name ?? 'More')
      if (name === null) summary.removeAttribute('aria-current')
      else summary.setAttribute('aria-current', 'true')
    },
  }
}
