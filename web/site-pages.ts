import type { SessionKeeper } from './session.ts'
import { peopleView } from './views/people.ts'
import { accountView, linkView, signInView } from './views/sign-in.ts'

interface SitePage {
  readonly title: string
  readonly node: HTMLElement
}
type SitePages = Readonly<Record<string, (rest: string, session: SessionKeeper, back: () => void) => SitePage>>

/** Pages that are about no run, by the first word of the address; `rest` is the second. `back` leads to where the person was. */
export const sitePages: SitePages = {
  'sign-in': (_, session, back) => ({ title: 'Sign in', node: signInView(session, back) }),
  link: (token, session, back) => ({ title: 'Welcome', node: linkView(token, session, back) }),
  account: (_, session, back) => ({ title: 'Your account', node: accountView(session, back) }),
  people: (_, session) => ({ title: 'People', node: peopleView(session.person()) }),
}

/** Shown to whom the server lets see nothing yet. */
export const publicPages: ReadonlySet<string> = new Set(['sign-in', 'link'])
