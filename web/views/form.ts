import { said } from '../api.ts'
import { el, say } from './dom.ts'

/** A labelled field; `node` is what is shown where that is more than the input. */
export function fieldOf(label: string, input: HTMLElement, hint: string | null = null, node: HTMLElement = input): HTMLElement {
  const text = hint === null ? null : el('small', { class: 'soft hint', id: `${input.id}-hint`, text: hint })
  if (text !== null) input.setAttribute('aria-describedby', text.id)
  return el('p', { class: 'field' }, el('label', { for: input.id, text: label }), el('span', {}, node, text))
}

/** A password field; what is typed can be looked at. */
export function passwordOf(id: string, autocomplete: 'current-password' | 'new-password') {
  const input = el('input', { type: 'password', id, name: id, autocomplete, required: true, maxlength: 256, spellcheck: 'false' })
  const look = el('button', {
    type: 'button',
    class: 'small',
    'aria-pressed': 'false',
    'aria-label': 'Show what is typed',
    text: 'Show',
  })
  look.addEventListener('click', () => {
    const shown = input.type === 'text'
    input.type = shown ? 'password' : 'text'
    look.setAttribute('aria-pressed', String(!shown))
    say(look, shown ? 'Show' : 'Hide')
  })
  return { input, node: el('span', { class: 'with-look' }, input, look) }
}

export const passwordHint =
  'At least 15 characters; four or five words that have nothing to do with each other do. Spaces are welcome.'

/** A form that sends once at a time and says how it went. */
export function formOf(
  o: { readonly id: string; readonly title: string; readonly send: string },
  send: () => Promise<string>,
  ...parts: readonly (Node | string | null)[]
) {
  const button = el('button', { type: 'submit', class: 'solid', text: o.send })
  const says = el('p', { role: 'status', class: 'says' })
  const node = el(
    'form',
    { class: 'sheet form', id: o.id, novalidate: true, 'aria-labelledby': `${o.id}-title` },
    el('h2', { id: `${o.id}-title`, text: o.title }),
    ...parts,
    el('div', { class: 'row' }, button),
    says,
  )
  node.addEventListener('submit', (event) => {
    event.preventDefault()
    if (button.getAttribute('aria-disabled') === 'true') return
    button.setAttribute('aria-disabled', 'true')
    say(says, '')
    void send()
      .catch((error: unknown) => `Not done: ${said(error)}`)
      .then((text) => {
        button.removeAttribute('aria-disabled')
        say(says, text)
      })
  })
  return node
}
