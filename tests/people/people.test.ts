import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { describe, expect, it, onTestFinished } from 'vitest'
import { createPeople } from '../../server/people/people.ts'
import { peopleOf, toldOf } from '../../server/people/replay.ts'
import { roles } from '../../server/people/roles.ts'
import type { ScryptCost } from '../../server/people/scrypt.ts'
import { createHasher } from '../../server/people/scrypt.ts'
import { openStore } from '../../server/store/open.ts'
import { handClock, tempDir } from '../monitor/bench.ts'

const cheap: ScryptCost = { logN: 4, r: 8, p: 1 }
const secret = 'a kettle under the blue staircase'
const why = 'for the night shift'

/** People on a store of their own, time passed by hand. */
function bench(dir = tempDir(), cost = cheap) {
  const store = openStore(dir, { synchronous: 'NORMAL' })
  let open = true
  const close = () => {
    if (open) store.close()
    open = false
  }
  onTestFinished(close)
  const clock = handClock(Date.UTC(2031, 0, 1))
  const hasher = createHasher({ cost })
  const people = createPeople({ store, wallMs: clock.now, hasher })
  const first = async (name = 'Odo Fenn') => people.links.use(people.administratorLink(), { name, password: secret })
  const by = { id: 1, name: 'Odo Fenn', reason: why }
  return { store, clock, hasher, people, first, by, close, acts: () => store.audit.list().map((a) => `${a.person}: ${a.act}`) }
}
type Bench = ReturnType<typeof bench>
/** A person with a password. */
async function member(b: Bench, name: string, role: (typeof roles)[number] = 'operator') {
  const { id, token } = b.people.accounts.add(name, role, b.by)
  const session = await b.people.links.use(token, { name: null, password: secret })
  return { id, session }
}
const code = async (asked: Promise<unknown>): Promise<string> =>
  asked.then(
    () => 'taken',
    (e: { code: string }) => e.code,
  )

describe('signing in', () => {
  it('gives a token of 256 bits, new each time, of which the store has the SHA-256 alone', async () => {
    const b = bench()
    await b.first()
    const tokens = [await b.people.signIn('odo fenn', secret, '192.0.2.1'), await b.people.signIn('ODO FENN', secret, '192.0.2.1')]
    expect(tokens[0]).toMatch(/^[\w-]{43}$/)
    expect(tokens[0]).not.toBe(tokens[1])
    expect(b.people.sessions.of(tokens[0]!)).toMatchObject({ name: 'Odo Fenn', role: 'administrator', resting: false })
    const other = tokens[0]!.startsWith('A') ? 'B' : 'A'
    expect(b.people.sessions.of(other + tokens[0]!.slice(1))).toBeNull()
    for (const none of ['', 'x', tokens[0]!.slice(1), `${tokens[0]}=`]) expect(b.people.sessions.of(none)).toBeNull()
  })

  it('refuses a wrong password, an unknown name, a disabled person and one without a password alike, with one scrypt each', async () => {
    const b = bench()
    await b.first()
    const { id } = await member(b, 'Ruth Alder')
    b.people.accounts.setDisabled(id, true, b.by)
    b.people.accounts.add('Ida Moor', 'viewer', b.by)
    const told = new Set<string>()
    for (const name of ['Odo Fenn', 'Nobody Here', 'Ruth Alder', 'Ida Moor']) {
      const before = b.hasher.computed()
      const password = name === 'Odo Fenn' ? `${secret}!` : secret
      const error = await b.people.signIn(name, password, '192.0.2.1').catch((e: Error & { code: string; hint: string }) => e)
      told.add(
        JSON.stringify(
          error instanceof Error ? [error.message, (error as { code?: string }).code, (error as { hint?: string }).hint] : 'in',
        ),
      )
      expect(b.hasher.computed(), name).toBe(before + 1)
    }
    expect(told.size).toBe(1)
    expect([...told][0]).toContain('SIGN_IN_REFUSED')
  })

  // REC-07: failed attempts are recorded.
  it('records who came in, and each failure by name; a name nobody has is not written down, as it may be a password', async () => {
    const b = bench()
    await b.first()
    await code(b.people.signIn('Odo Fenn', 'wrong', '192.0.2.1'))
    await code(b.people.signIn('hunter2 hunter2', 'wrong', '192.0.2.9'))
    await b.people.signIn('Odo Fenn', secret, '192.0.2.1')
    const trail = b.store.audit.list()
    expect(trail.slice(-3).map((a) => [a.person, a.act, (a.body as { address: string }).address])).toEqual([
      ['Odo Fenn', 'sign-in.refused', '192.0.2.1'],
      ['nobody', 'sign-in.refused', '192.0.2.9'],
      ['Odo Fenn', 'sign-in', '192.0.2.1'],
    ])
    expect(JSON.stringify(trail)).not.toMatch(/hunter2|wrong/)
  })

  it.each(['Odo Fenn', 'Nobody Here'])(
    'makes %s wait after five failures, also with the right password and after a restart, and no scrypt is spent meanwhile',
    async (name) => {
      const dir = tempDir()
      const b = bench(dir)
      await b.first()
      for (let i = 0; i < 5; i++) expect(await code(b.people.signIn(name, `wrong ${i}`, `192.0.2.${i}`))).toBe('SIGN_IN_REFUSED')
      const before = b.hasher.computed()
      expect(await code(b.people.signIn(name, secret, '192.0.2.77'))).toBe('SIGN_IN_WAIT')
      expect(b.hasher.computed()).toBe(before)
      b.close()
      const again = bench(dir)
      expect(await code(again.people.signIn(name, secret, '192.0.2.77'))).toBe('SIGN_IN_WAIT')
      again.clock.pass(2001)
      expect(await code(again.people.signIn(name, secret, '192.0.2.77'))).toBe(name === 'Odo Fenn' ? 'taken' : 'SIGN_IN_REFUSED')
    },
  )

  it('counts tries that come at the same moment: of fifty, five are judged', async () => {
    const b = bench()
    await b.first()
    const before = b.hasher.computed()
    const answers = await Promise.all(
      Array.from({ length: 50 }, (_, i) => code(b.people.signIn('Odo Fenn', `wrong ${i}`, '192.0.2.1'))),
    )
    expect(answers.filter((a) => a === 'SIGN_IN_WAIT').length).toBe(45)
    expect(b.hasher.computed()).toBe(before + 5)
  })

  it('makes an address wait after 20 failures over many names, and a success of its own does not set it free', async () => {
    const b = bench()
    await b.first()
    for (let i = 0; i < 21; i++) await code(b.people.signIn(`Person ${'abcdefghijklmnopqrstu'[i]}`, 'wrong', '192.0.2.1'))
    expect(await code(b.people.signIn('Odo Fenn', secret, '192.0.2.1'))).toBe('SIGN_IN_WAIT')
    expect(await code(b.people.signIn('Odo Fenn', secret, '192.0.2.2'))).toBe('taken')
    b.clock.pass(2001)
    expect(await code(b.people.signIn('Odo Fenn', secret, '192.0.2.1'))).toBe('taken')
    await code(b.people.signIn('Person z', 'wrong', '192.0.2.1'))
    expect(await code(b.people.signIn('Odo Fenn', secret, '192.0.2.1'))).toBe('SIGN_IN_WAIT')
  })

  it('renews a hash that was made at other costs', async () => {
    const dir = tempDir()
    const old = bench(dir)
    await old.first()
    old.close()
    const b = bench(dir, { logN: 5, r: 8, p: 1 })
    expect(b.store.people.byId(1)!.password).toMatch(/^scrypt:4:/)
    await b.people.signIn('Odo Fenn', secret, '192.0.2.1')
    expect(b.store.people.byId(1)!.password).toMatch(/^scrypt:5:/)
    await b.people.signIn('Odo Fenn', secret, '192.0.2.1')
  })
})

describe('a reset while a password is computed', () => {
  it.each(['signIn', 'changePassword'] as const)('wins over %s: no session, and the void password stays void', async (how) => {
    const dir = tempDir()
    const old = bench(dir)
    await old.first()
    const { id } = await member(old, 'Ruth Alder')
    old.close()
    const b = bench(dir, { logN: 5, r: 8, p: 1 })
    const meanwhile = async (password: string) => {
      b.people.accounts.reset(id, b.by)
      return b.hasher.hash(password)
    }
    const slow = createPeople({ store: b.store, wallMs: b.clock.now, hasher: { ...b.hasher, hash: meanwhile } })
    const asked =
      how === 'signIn'
        ? slow.signIn('Ruth Alder', secret, '192.0.2.1')
        : slow.changePassword(id, secret, 'four otters in a yellow boat', '192.0.2.1')
    expect(await code(asked)).toBe('SIGN_IN_REFUSED')
    expect(b.store.people.byId(id)!.password).toBeNull()
    expect(b.people.strangers()).toEqual([])
  })
})

describe('a session', () => {
  // REC-07
  it('reads on but rests after 30 min without use, goes on with use, and is over after 12 h', async () => {
    const b = bench()
    const token = await b.first()
    const minute = 60_000
    b.clock.pass(29 * minute)
    b.people.sessions.seen(token)
    b.clock.pass(29 * minute)
    expect(b.people.sessions.of(token)).toMatchObject({ resting: false })
    b.clock.pass(minute)
    expect(b.people.sessions.of(token)).toMatchObject({ resting: true })
    b.people.sessions.seen(token)
    expect(b.people.sessions.of(token)).toMatchObject({ resting: true })
    b.clock.pass(11 * 60 * minute)
    expect(b.people.sessions.of(token)).toMatchObject({ resting: true })
    b.clock.pass(minute)
    expect(b.people.sessions.of(token)).toBeNull()
  })
  it('ends by signing out, by another role, a reset, being disabled; a changed password ends the others and gives a new one', async () => {
    const b = bench()
    await b.first()
    const ends = async (act: (id: number) => unknown) => {
      const { id, session } = await member(b, `Member ${'abcdef'[b.people.accounts.list().length]}`)
      await act(id)
      return b.people.sessions.of(session)
    }
    expect(await ends((id) => b.people.accounts.setRole(id, 'viewer', b.by))).toBeNull()
    expect(await ends((id) => b.people.accounts.setDisabled(id, true, b.by))).toBeNull()
    expect(await ends((id) => b.people.accounts.reset(id, b.by))).toBeNull()
    let fresh = ''
    expect(
      await ends(async (id) => {
        fresh = await b.people.changePassword(id, secret, 'four otters in a yellow boat', '192.0.2.1')
      }),
    ).toBeNull()
    expect(b.people.sessions.of(fresh)).not.toBeNull()
    b.people.sessions.end(fresh)
    expect(b.people.sessions.of(fresh)).toBeNull()
  })
})

describe('one-time links', () => {
  it('make one administrator, once; the next start gives another only by hand; an earlier one is void when a new one is made', async () => {
    const b = bench()
    expect(b.people.any()).toBe(false)
    const [old, link] = [b.people.administratorLink(), b.people.administratorLink()]
    expect(await code(b.people.links.use(old, { name: 'Odo Fenn', password: secret }))).toBe('LINK_SPENT')
    expect(b.people.links.look(link)).toMatchObject({ name: null })
    const answers = await Promise.all(
      ['Odo Fenn', 'Ann Hull'].map((name) => code(b.people.links.use(link, { name, password: secret }))),
    )
    expect(answers.sort()).toEqual(['LINK_SPENT', 'taken'])
    expect(b.people.any()).toBe(true)
    expect(b.people.accounts.list().map((p) => p.role)).toEqual(['administrator'])
  })
  it('are over after 48 h, with a refused password still good, and void for a disabled person', async () => {
    const b = bench()
    await b.first()
    const { id, token } = b.people.accounts.add('Ruth Alder', 'operator', b.by)
    expect(await code(b.people.links.use(token, { name: null, password: 'short' }))).toBe('PERSON_REFUSED')
    b.clock.pass(48 * 3_600_000 - 1)
    expect(b.people.links.look(token).name).toBe('Ruth Alder')
    b.clock.pass(1)
    expect(await code(b.people.links.use(token, { name: null, password: secret }))).toBe('LINK_SPENT')
    const next = b.people.accounts.reset(id, b.by)
    b.people.accounts.setDisabled(id, true, b.by)
    expect(await code(b.people.links.use(next, { name: null, password: secret }))).toBe('LINK_SPENT')
  })
})

describe('people', () => {
  it('are never two of one name, never dropped or renamed, by the database itself', async () => {
    const dir = tempDir()
    const b = bench(dir)
    await b.first()
    for (const name of ['odo  fenn', 'ＯＤＯ ＦＥＮＮ'])
      expect(() => b.people.accounts.add(name, 'viewer', b.by)).toThrow(/already/)
    b.close()
    const { default: Database } = await import('better-sqlite3')
    const db = new Database(join(dir, 'clearbore.db'))
    expect(() => db.exec('DELETE FROM person')).toThrow('disabled, not dropped')
    expect(() => db.exec("UPDATE person SET name = 'Other'")).toThrow('keeps the name')
    expect(() =>
      db.exec("INSERT OR REPLACE INTO person (id, name, key, role, disabled, added_ms) VALUES (1, 'x', 'x', 'viewer', 0, 0)"),
    ).toThrow('a person of that name')
    // Who changes the file by hand is told at the next start.
    db.exec("UPDATE person SET role = 'engineer'")
    db.close()
    expect(bench(dir).people.strangers()).toEqual(['Odo Fenn'])
  })
  it('nobody acts on himself, so one administrator is always left; each act takes a reason of five characters', async () => {
    const b = bench()
    await b.first()
    const { id } = await member(b, 'Ruth Alder')
    for (const act of [
      () => b.people.accounts.setRole(1, 'viewer', b.by),
      () => b.people.accounts.setDisabled(1, true, b.by),
      () => b.people.accounts.reset(1, b.by),
    ])
      expect(act).toThrow(/nobody changes the own role/)
    expect(() => b.people.accounts.setRole(id, 'viewer', { ...b.by, reason: ' no  ' })).toThrow(/reason of at least 5/)
    expect(() => b.people.accounts.setRole(99, 'viewer', b.by)).toThrow(/no person 99/)
    expect(b.people.accounts.list().map((p) => [p.name, p.role, p.disabled])).toEqual([
      ['Odo Fenn', 'administrator', false],
      ['Ruth Alder', 'operator', false],
    ])
  })
  // REC-07
  it('of any sequence of acts are told by the audit trail as the store has them', { timeout: 60_000 }, async () => {
    const what = fc.record({
      kind: fc.constantFrom('add', 'role', 'disable', 'enable', 'reset', 'link', 'signIn', 'wrong', 'change', 'out'),
      who: fc.nat(7),
      role: fc.constantFrom(...roles),
      by: fc.nat(7),
    })
    await fc.assert(
      fc.asyncProperty(fc.array(what, { maxLength: 30 }), async (acts) => {
        const dir = tempDir()
        const b = bench(dir)
        await b.first()
        const links = new Map<number, string>()
        const sessions: string[] = []
        for (const { kind, who, role, by } of acts) {
          const name = `Person ${'abcdefgh'[who]}`
          const person = b.people.accounts.list().find((p) => p.name === name)
          const id = person?.id ?? 1
          // Only who may administer gets this far (http/people.ts).
          const able = b.store.people.list().filter((p) => p.role === 'administrator' && !p.disabled && p.password !== null)
          const as = { ...able[by % able.length]!, reason: why }
          const does: Record<typeof kind, () => unknown> = {
            add: () => {
              const made = b.people.accounts.add(name, role, as)
              links.set(made.id, made.token)
            },
            role: () => b.people.accounts.setRole(id, role, as),
            disable: () => b.people.accounts.setDisabled(id, true, as),
            enable: () => b.people.accounts.setDisabled(id, false, as),
            reset: () => links.set(id, b.people.accounts.reset(id, as)),
            link: async () => sessions.push(await b.people.links.use(links.get(id) ?? '', { name: null, password: secret })),
            signIn: async () => sessions.push(await b.people.signIn(name, secret, '192.0.2.1')),
            wrong: () => b.people.signIn(name, 'wrong', '192.0.2.1'),
            change: () => b.people.changePassword(id, secret, secret, '192.0.2.1'),
            out: () => b.people.sessions.end(sessions.pop() ?? ''),
          }
          // A refusal is an answer like another; what counts is what it leaves.
          await Promise.resolve()
            .then(does[kind])
            .catch((error: { code?: string }) => expect(error.code).toMatch(/^(PERSON|SIGN_IN|LINK)_/))
        }
        expect(peopleOf(b.store.audit.list())).toEqual(b.store.people.list().map(toldOf))
        expect(b.people.strangers()).toEqual([])
        expect(b.people.any()).toBe(true)
        b.close()
        // Neither a password nor a token in the file.
        const bytes = readFileSync(join(dir, 'clearbore.db'))
        for (const text of [secret, ...links.values(), ...sessions]) expect(bytes.includes(text)).toBe(false)
      }),
      { numRuns: 25 },
    )
  })
})
