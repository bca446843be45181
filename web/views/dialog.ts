import { el, fill } from './dom.ts'

/**
 * A modal window of the page itself: named by its heading, focus inside it until closed, Escape closes, and focus returns to where it was. It is gone from
 * the page when closed.
 */
export function openDialog(title: string, ...content: readonly (Node | null)[]) {
  const heading = el('h2', { id: 'dialog-title', text: title })
  const close = el('button', { type: 'button', class: 'small', text: 'Close' })
  const body = el('div', { class: 'dialog-body' })
  const node = el(
    'dialog',
    { 'aria-labelledby': 'dialog-title', class: 'dialog' },
    el('div', { class: 'head' }, heading, close),
    body,
  )
  const from = document.activeElement
  fill(body, ...content)
  close.addEventListener('click', () => node.close())
  node.addEventListener('close', () => {
    node.remove()
    if (from instanceof HTMLElement && from.isConnected) from.focus()
  })
  document.body.append(node)
  node.showModal()
  return { node, body, close: () => node.close() }
}

/** A form in a dialog: what it sends comes back as a refusal, shown in it with its mend, or as '' and it closes. */
export function openForm(title: string, submitText: string, fields: readonly (Node | null)[], send: () => Promise<string>) {
  const refused = el('p', { class: 'refused', role: 'alert', hidden: true })
  const submit = el('button', { type: 'submit', class: 'solid', text: submitText })
  const cancel = el('button', { type: 'button', text: 'Leave as it is' })
  const form = el('form', { class: 'ask', novalidate: true }, ...fields, refused, el('div', { class: 'row' }, submit, cancel))
  const dialog = openDialog(title, form)
  cancel.addEventListener('click', () => dialog.close())
  form.addEventListener('submit', (event) => {
    event.preventDefault()
    if (submit.getAttribute('aria-disabled') === 'true') return
    submit.setAttribute('aria-disabled', 'true')
    const show = (text: string): void => {
      submit.removeAttribute('aria-disabled')
      refused.hidden = text === ''
      refused.textContent = text
      if (text === '') dialog.close()
    }
    send().then(show, (error: unknown) => show(`not done: ${error instanceof Error ? error.message : String(error)}`))
  })
  form.querySelector<HTMLElement>('input, select, textarea')?.focus()
  return dialog
}
