import type { LinkFacts, Session } from '../../server/wire/index.ts'
import { deleteJson, postJson, said } from '../api.ts'
import { zoneClock } from '../model/clock.ts'
import type { SessionKeeper } from '../session.ts'
import { el, fill, say } from './dom.ts'
import { fieldOf, formOf, passwordHint, passwordOf } from './form.ts'

const clock = zoneClock('UTC')
const pageOf = (page: string, title: string, ...parts: readonly Node[]): HTMLElement => {
  const node = el('main', { id: 'main', class: 'list', tabindex: -1 }, el('h1', { class: 'vh', text: title }), ...parts)
  node.dataset['page'] = page
  return node
}
const nameInput = (id: string) =>
  el('input', { type: 'text', id, name: id, autocomplete: 'username', required: true, maxlength: 60, spellcheck: 'false' })

/** Name and password. `done` leads back to where the person was. */
export function signInView(session: SessionKeeper, done: () => void): HTMLElement {
  const now = session.now()
  const name = nameInput('name')
  const password = passwordOf('password', 'current-password')
  if (now?.resting === true) name.value = now.person?.name ?? ''
  const form = formOf(
    { id: 'sign-in', title: 'Sign in', send: 'Sign in' },
    async () => {
      if (name.value.trim() === '' || password.input.value === '') return 'Give your name and your password.'
      const typed = password.input.value
      password.input.value = ''
      session.take(await postJson<Session>('/api/session', { name: name.value, password: typed }))
      done()
      return ''
    },
    fieldOf('Name', name),
    fieldOf('Password', password.input, null, password.node),
  )
  const hint =
    now?.hasPeople === false
      ? 'There is no administrator yet. Where the server was started it wrote a link that makes the first one; started with --new-administrator-link it writes another.'
      : 'Forgotten your password, or new here? An administrator gives you a link to set one.'
  const open = now?.mayRead === true ? el('p', {}, el('a', { href: '#/watch', text: 'Look at the skid without signing in' })) : null
  return pageOf('sign-in', 'Sign in', form, el('p', { class: 'soft', text: hint }), ...(open === null ? [] : [open]))
}

/** The token of the link that the page was opened with, for as long as the page lives. */
let held = ''

/** What a one-time link leads to: a password for a person, or the first administrator. The token is taken out of the address at once. */
export function linkView(given: string, session: SessionKeeper, done: () => void): HTMLElement {
  if (given !== '') held = given
  const token = held
  history.replaceState(null, '', '#/link')
  const status = el('p', { role: 'status', text: 'Looking at the link.' })
  const node = pageOf('link', 'Welcome', status)
  postJson<LinkFacts>('/api/links/look', { token }).then(
    (facts) => {
      const name = nameInput('name')
      const password = passwordOf('password', 'new-password')
      const form = formOf(
        {
          id: 'welcome',
          title: facts.name === null ? 'Make an administrator' : `Password of ${facts.name}`,
          send: 'Set the password',
        },
        async () => {
          const body = { token, name: facts.name === null ? name.value : null, password: password.input.value }
          session.take(await postJson<Session>('/api/links/use', body))
          password.input.value = ''
          done()
          return ''
        },
        facts.name === null ? fieldOf('Your name', name, 'As it shall stand in the record. It cannot be changed later.') : null,
        fieldOf('Password', password.input, passwordHint, password.node),
      )
      const about =
        facts.name === null
          ? 'An administrator adds people, gives them roles and links, and disables them. Acts on a run belong to operators and engineers.'
          : 'You are signed in as soon as it is set; the link is then used up.'
      fill(
        node,
        el('h1', { class: 'vh', text: 'Welcome' }),
        form,
        el('p', { class: 'soft', text: `${about} The link is good until ${clock.full(facts.endsMs)} UTC.` }),
      )
      ;(facts.name === null ? name : password.input).focus()
    },
    (error: unknown) => say(status, `${said(error)}.`),
  )
  return node
}

/** The own account: role, password, signing out. */
export function accountView(session: SessionKeeper, done: () => void): HTMLElement {
  const now = session.now()
  const person = now?.person ?? null
  if (person === null || now?.how !== 'signed-in')
    return pageOf(
      'account',
      'Your account',
      el('p', {
        text:
          now?.how === 'demo'
            ? 'This is the demo: whoever is at this machine acts as the demo operator, without signing in. It has no account.'
            : 'Nobody is signed in.',
      }),
    )
  const old = passwordOf('old', 'current-password')
  const fresh = passwordOf('new', 'new-password')
  const change = formOf(
    { id: 'change-password', title: 'Change the password', send: 'Change it' },
    async () => {
      const body = { old: old.input.value, password: fresh.input.value }
      session.take(await postJson<Session>('/api/session/password', body))
      old.input.value = ''
      fresh.input.value = ''
      return 'Changed. Wherever else you were signed in, that is over.'
    },
    fieldOf('Password of now', old.input, null, old.node),
    fieldOf('New password', fresh.input, passwordHint, fresh.node),
  )
  const out = formOf({ id: 'sign-out', title: 'Leave', send: 'Sign out' }, async () => {
    session.take(await deleteJson<Session>('/api/session'))
    done()
    return ''
  })
  return pageOf(
    'account',
    'Your account',
    el('p', {}, el('b', { text: person.name }), `, ${person.role}`),
    el('p', {
      class: 'soft',
      text: `${now.endsMs === null ? '' : `This sign-in ends at ${clock.full(now.endsMs)} UTC. `}After ${Math.round(now.idleMs / 60_000)} min without a touch the page goes on showing, and asks for the password before it acts.`,
    }),
    change,
    out,
  )
}
