import type { FastifyPluginAsyncTypebox } from '@fastify/type-provider-typebox'
import type { FastifyRequest } from 'fastify'
import { Type } from 'typebox'
import type { By } from '../people/accounts.ts'
import type { People } from '../people/people.ts'
import type { Role } from '../people/roles.ts'
import type { PersonFacts } from '../wire/people.ts'
import { signedIn } from './access.ts'
import { addSchema, oneTimeSchema, personSchema, reasonSchema, roleChangeSchema } from './people-schemas.ts'
import { replies } from './schemas.ts'

export interface PeopleRoutes {
  readonly people: People
}

const params = Type.Object({ person: Type.Integer({ minimum: 1 }) })
const config = { needs: 'administer' } as const

/** People for administrators. A link is given out once, in the reply; the server keeps its hash alone. */
export const peopleRoutes: FastifyPluginAsyncTypebox<PeopleRoutes> = async (app, { people }) => {
  const { accounts } = people
  const byOf = ({ person }: Pick<FastifyRequest, 'person'>, reason: string): By => {
    const { id, name } = signedIn(person)
    // The demo's person is nobody's account, and may not administer.
    return { id: id ?? -1, name, reason }
  }
  const list = (): PersonFacts[] =>
    accounts.list().map(({ id, name, role, disabled, password, addedMs, signedInMs }) => ({
      id,
      name,
      role,
      disabled,
      hasPassword: password !== null,
      addedMs,
      signedInMs,
    }))
  const people200 = replies(Type.Array(personSchema))

  app.get('/people', { config, schema: { summary: 'all people, disabled ones too', response: people200 } }, async () => list())

  app.post(
    '/people',
    {
      config,
      schema: {
        summary: 'add a person; the reply has the one-time link for the password',
        body: addSchema,
        response: replies(oneTimeSchema),
      },
    },
    async (request) => {
      const { name, role, reason } = request.body
      const { id, token } = accounts.add(name, role as Role, byOf(request, reason))
      return { id, path: linkPath(token) }
    },
  )

  app.post(
    '/people/:person/role',
    {
      config,
      schema: { summary: 'change a role; sessions of the person end', params, body: roleChangeSchema, response: people200 },
    },
    async (request) => {
      accounts.setRole(request.params.person, request.body.role as Role, byOf(request, request.body.reason))
      return list()
    },
  )

  for (const [word, disabled] of [
    ['disable', true],
    ['enable', false],
  ] as const)
    app.post(
      `/people/:person/${word}`,
      { config, schema: { summary: `${word} a person; past acts keep the name`, params, body: reasonSchema, response: people200 } },
      async (request) => {
        accounts.setDisabled(request.params.person, disabled, byOf(request, request.body.reason))
        return list()
      },
    )

  app.post(
    '/people/:person/reset',
    {
      config,
      schema: {
        summary: 'the password is void at once; the reply has a one-time link for a new one',
        params,
        body: reasonSchema,
        response: replies(oneTimeSchema),
      },
    },
    async (request) => {
      const id = request.params.person
      return { id, path: linkPath(accounts.reset(id, byOf(request, request.body.reason))) }
    },
  )
}

/** Behind the #, so that the token is sent to no server and stands in no log. */
export const linkPath = (token: string): string => `/#/link/${token}`
