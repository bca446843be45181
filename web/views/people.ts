import type { OneTimeLink, PersonFacts, RoleName } from '../../server/wire/index.ts'
import { getJson, postJson, said } from '../api.ts'
import { zoneClock } from '../model/clock.ts'
import { el, fill, say } from './dom.ts'
import { fieldOf, formOf } from './form.ts'

const clock = zoneClock('UTC')
const roles: readonly (readonly [RoleName, string])[] = [
  ['viewer', 'looks'],
  ['operator', 'works with a run'],
  ['engineer', 'also limits and settings'],
  ['reviewer', 'reviews the audit trail'],
  ['administrator', 'manages people'],
]
const roleSelect = (id: string) =>
  el('select', { id, name: id }, ...roles.map(([role, does]) => el('option', { value: role, text: `${role}: ${does}` })))
const changes = {
  role: 'give another role',
  disable: 'disable',
  enable: 'enable again',
  reset: 'void the password, make a link for a new one',
} as const

/** People for administrators: who there is, adding one, changing one. Every change takes a reason. */
export function peopleView(me: string): HTMLElement {
  const body = el('tbody')
  const who = el('select', { id: 'who', name: 'who' })
  const status = el('p', { role: 'status', class: 'hush', text: 'Loading.' })
  const handed = el('section', { class: 'sheet handed', hidden: true, 'aria-label': 'One-time link' })
  let people: readonly PersonFacts[] = []

  function show(list: readonly PersonFacts[]): void {
    people = list
    say(status, list.length === 1 ? 'You are the only one so far.' : '')
    fill(body, ...list.map(rowOf))
    const was = who.value
    const others = list.filter((p) => p.name !== me)
    fill(who, ...others.map((p) => el('option', { value: p.id, text: `${p.name}, ${p.role}${p.disabled ? ', disabled' : ''}` })))
    if (others.some((p) => String(p.id) === was)) who.value = was
    change.hidden = others.length === 0
  }
  const load = async (): Promise<void> => show(await getJson<PersonFacts[]>('/api/people'))

  /** The link is on no other page and in no log: it is shown here once. */
  function hand(name: string, { path }: OneTimeLink): void {
    const text = el('input', { type: 'text', id: 'link', readonly: true, class: 'wide-input' })
    text.value = new URL(path, location.href).href
    const copied = el('span', { role: 'status' })
    const copy = el('button', { type: 'button', class: 'small', text: 'Copy' })
    copy.addEventListener('click', () => {
      text.select()
      navigator.clipboard?.writeText(text.value).then(
        () => say(copied, 'copied'),
        () => say(copied, 'marked: copy it with the keyboard'),
      )
    })
    fill(
      handed,
      el('h2', { text: `Link for ${name}` }),
      el('p', {
        text: 'Hand it to the person in a way that others do not read. It sets the password, works once, within 48 hours, and is shown only here and now.',
      }),
      el('p', { class: 'with-look' }, el('label', { class: 'vh', for: 'link', text: `Link for ${name}` }), text, copy, copied),
    )
    handed.hidden = false
    text.focus()
    text.select()
  }

  const name = el('input', {
    type: 'text',
    id: 'new-name',
    name: 'new-name',
    maxlength: 60,
    autocomplete: 'off',
    spellcheck: 'false',
  })
  const role = roleSelect('new-role')
  role.value = 'operator'
  const why = reasonInput('new-reason')
  const add = formOf(
    { id: 'add-person', title: 'Add a person', send: 'Add' },
    async () => {
      const made = await postJson<OneTimeLink>('/api/people', { name: name.value, role: role.value, reason: why.value })
      hand(name.value, made)
      add.reset()
      role.value = 'operator'
      await load()
      return ''
    },
    fieldOf('Name', name, 'As it shall stand in the record. One person, one name; it cannot be changed later.'),
    fieldOf('Role', role),
    fieldOf('Reason', why),
  )

  const what = el(
    'select',
    { id: 'what', name: 'what' },
    ...Object.entries(changes).map(([value, text]) => el('option', { value, text })),
  )
  const newRole = roleSelect('other-role')
  const roleField = fieldOf('New role', newRole)
  what.addEventListener('change', () => {
    roleField.hidden = what.value !== 'role'
  })
  const reason = reasonInput('reason')
  const change = formOf(
    { id: 'change-person', title: 'Change a person', send: 'Change' },
    async () => {
      const person = people.find((p) => String(p.id) === who.value)
      if (person === undefined) return 'Choose a person.'
      const url = `/api/people/${person.id}/${what.value}`
      const sent = { reason: reason.value, ...(what.value === 'role' ? { role: newRole.value } : {}) }
      if (what.value === 'reset') hand(person.name, await postJson<OneTimeLink>(url, sent))
      else await postJson<unknown>(url, sent)
      reason.value = ''
      await load()
      return `Done. ${person.name} is no longer signed in anywhere.`
    },
    fieldOf('Person', who),
    fieldOf('Change', what),
    roleField,
    fieldOf('Reason', reason),
  )
  change.hidden = true

  const heads = ['Name', 'Role', 'State', 'Last sign-in, UTC', 'Added, UTC']
  const table = el(
    'table',
    { class: 'runs people' },
    el('thead', {}, el('tr', {}, ...heads.map((h) => el('th', { scope: 'col', text: h })))),
    body,
  )
  const node = el(
    'main',
    { id: 'main', class: 'list', tabindex: -1 },
    el('h1', { text: 'People' }),
    el('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': 'All people' }, table),
    status,
    handed,
    el('div', { class: 'pair' }, add, change),
  )
  node.dataset['page'] = 'people'
  load().catch((error: unknown) => say(status, `${said(error)}.`))
  return node
}

const reasonInput = (id: string) => el('input', { type: 'text', id, name: id, maxlength: 500, autocomplete: 'off' })

const rowOf = (p: PersonFacts): HTMLElement =>
  el(
    'tr',
    { 'data-person': p.name, 'data-role': p.role, 'data-state': p.disabled ? 'disabled' : 'enabled' },
    el('th', { scope: 'row', text: p.name }),
    el('td', { text: p.role }),
    el('td', { text: p.disabled ? 'disabled' : p.hasPassword ? 'may sign in' : 'has a link, no password yet' }),
    el('td', { class: 'nowrap', text: p.signedInMs === null ? 'never' : clock.full(p.signedInMs) }),
    el('td', { class: 'nowrap', text: clock.full(p.addedMs) }),
  )
