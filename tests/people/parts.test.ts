import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { nameKey, nameOf } from '../../server/people/name.ts'
import { networkOf } from '../../server/people/network.ts'
import { checkPassword } from '../../server/people/password.ts'
import { may, type Need, roles } from '../../server/people/roles.ts'
import { createHasher } from '../../server/people/scrypt.ts'
import { addressRule, type Failures, failedAgain, forgottenMs, nameRule, waitMs } from '../../server/people/waiting.ts'

describe('roles', () => {
  // REC-07: the administrator is independent of the process; a reviewer does not act on what he reviews.
  it('give the administrator no act on a run and nobody else the management of people', () => {
    const table = Object.fromEntries(
      roles.map((role) => [role, (['read', 'operate', 'engineer', 'review', 'administer'] as const).filter((n) => may(role, n))]),
    )
    expect(table).toEqual({
      viewer: ['read'],
      operator: ['read', 'operate'],
      engineer: ['read', 'operate', 'engineer'],
      reviewer: ['read', 'review'],
      administrator: ['read', 'administer'],
    })
    for (const need of ['public', 'own'] as Need[]) expect(roles.every((role) => may(role, need))).toBe(true)
  })
})

describe('names', () => {
  it.each([
    ['Ruth Alder', 'RUTH  ALDER'],
    ['Ruth Alder', 'Ｒｕｔｈ Ａｌｄｅｒ'],
    ['Jos\u00e9 Arno', 'Jose\u0301 Arno'],
    ['Strasser', 'STRASSER'],
    ['Gro\u00dfmann', 'GROSSMANN'],
    ['ﬁnn', 'finn'],
  ])('%s and %s are one name', (a, b) => {
    expect(nameKey(a)).toBe(nameKey(b))
  })
  it.each([
    ['one letter', 'x'],
    ['61 letters', 'x'.repeat(61)],
    ['markup', '<b>Ruth</b>'],
    ['a formula', '=1+1'],
    ['an invisible letter', 'Ruth\u200bAlder'],
    ['a turned direction', 'Ruth\u202eredlA'],
    ['a line break', 'Ruth\nAlder;'],
    ['digits alone', '12345'],
    ['letters of two scripts that look alike', 'R\u0443th Alder'],
    ['the demo person', 'Demo  Operator'],
    ['nobody', 'NOBODY'],
  ])('%s is none', (_, text) => {
    expect(() => nameOf(text)).toThrow(/no name to sign with/)
  })
  it('of many scripts are names, kept as written but for white space, and a key of a key is that key', () => {
    for (const name of ['Åsa Öberg', 'Ивона Рудь', 'Νίκη Λώτη', '山中 花', "Aoife O'Dun", 'Jean-Luc P. 3'])
      expect(nameOf(` ${name} `)).toBe(name)
    fc.assert(fc.property(fc.string({ unit: 'binary', maxLength: 40 }), (s) => nameKey(nameKey(s)) === nameKey(s)))
  })
})

describe('passwords', () => {
  it.each([
    ['correct horse battery staple'],
    ['a kettle under the blue staircase'],
    ['vier kleine Kähne im Schilf'],
    ['雨の日は川の音が好きですからね歩く'],
    ['x7 Gq!m2 Lw# 9tR'],
  ])('%s may be one: length counts, not which characters', (password) => {
    expect(() => checkPassword(password, 'Ruth Alder')).not.toThrow()
  })
  it.each([
    ['14 characters', 'kettle stair 9', /at least 15 characters, got 14/],
    ['257 characters', `${'ab'.repeat(128)}c`, /at most 256/],
    ['a common one, doubled', 'passwordpassword', /well-known/],
    ['a common one with the year', 'Password2026!Password', /well-known/],
    ['the name and a year', 'Ruth-Alder-2026', /made of the name/],
    ['the name turned about', 'ALDER ruth alder', /made of the name/],
    ['one letter', 'a'.repeat(20), /different characters/],
    ['a run', 'abcdefghijklmnop', /runs like 1234/],
    ['another', '1234567890123456', /runs like 1234/],
    ['a row of keys', 'qwertyuiopasdfghjkl', /well-known/],
    ['the tool', 'clearbore operator', /well-known/],
  ])('%s is refused, and the message does not repeat it', (_, password, says) => {
    try {
      checkPassword(password, 'Ruth Alder')
      expect.unreachable()
    } catch (error) {
      expect(String(error)).toMatch(says)
      expect(String(error)).not.toContain(password)
    }
  })
})

describe('scrypt', () => {
  const hasher = createHasher({ cost: { logN: 6, r: 8, p: 1 } })
  it('keeps costs, a salt of its own and the hash; the same key strokes in another normal form are the same password', async () => {
    const [a, b] = [await hasher.hash('Caf\u00e9 au lait at dawn'), await hasher.hash('Caf\u00e9 au lait at dawn')]
    expect(a).toMatch(/^scrypt:6:8:1:[\w+/]{22}==:[\w+/]{43}=$/)
    expect(a).not.toBe(b)
    expect(await hasher.verify('Cafe\u0301 au lait at dawn', a)).toBe(true)
    expect(await hasher.verify('Cafe au lait at dawn', a)).toBe(false)
  })
  it('gives the hash of RFC 7914 section 12: "pleaseletmein", salt SodiumChloride, N 2^14, r 8, p 1', async () => {
    // The RFC's 64 bytes begin with these 32: PBKDF2 gives each block by itself.
    const hash = Buffer.from('7023bdcb3afd7348461c06cd81fd38ebfda8fbba904f8e3ea9b543f6545da1f2', 'hex').toString('base64')
    const stored = `scrypt:14:8:1:${Buffer.from('SodiumChloride').toString('base64')}:${hash}`
    expect(await createHasher().verify('pleaseletmein', stored)).toBe(true)
  })
  it('costs 64 MiB by default, and does the same work for somebody who is not there', async () => {
    const usual = createHasher()
    expect(await usual.hash('x')).toMatch(/^scrypt:16:8:1:/)
    expect([
      await hasher.verify('x', null),
      hasher.isStale('scrypt:5:8:1:AA==:AA=='),
      hasher.isStale('scrypt:6:8:1:AA==:AA=='),
    ]).toEqual([false, true, false])
    const before = hasher.computed()
    await hasher.verify('x', null)
    expect(hasher.computed()).toBe(before + 1)
  })
  it('lets twelve wait, and tells the thirteenth to come again', async () => {
    const busy = createHasher({ cost: { logN: 12, r: 8, p: 1 } })
    const asked = await Promise.allSettled(Array.from({ length: 20 }, () => busy.verify('x', null)))
    const refused = asked.filter((a) => a.status === 'rejected')
    expect(refused.length).toBe(8)
    expect(String((refused[0] as PromiseRejectedResult).reason)).toContain('too many people are signing in')
    expect(await busy.verify('x', null)).toBe(false)
  })
})

describe('an address', () => {
  it.each([
    ['192.0.2.7', '192.0.2.7'],
    ['::ffff:192.0.2.7', '192.0.2.7'],
    ['2001:db8:1:2:3:4:5:6', '2001:db8:1:2::/64'],
    ['2001:db8:1:2::9', '2001:db8:1:2::/64'],
    ['2001:0DB8::1', '2001:db8:0:0::/64'],
    ['::1', '0:0:0:0::/64'],
    ['fe80::1%eth0', 'fe80:0:0:0::/64'],
    ['not one', 'not one'],
  ])('%s counts as %s', (address, network) => {
    expect(networkOf(address)).toBe(network)
  })
})

describe('the wait after failed sign-ins', () => {
  const waitAfter = (count: number, rule = nameRule) => waitMs({ count, lastMs: 1e12 }, rule, 1e12) / 1000
  it('is nothing for four failures of a name, then 2, 4, 8 s ... and never more than 5 min; of an address from 20 on, at most 15 min', () => {
    expect([0, 1, 4, 5, 6, 7, 8, 12, 13, 99].map((n) => waitAfter(n))).toEqual([0, 0, 0, 2, 4, 8, 16, 256, 300, 300])
    expect([20, 21, 22, 30, 99].map((n) => waitAfter(n, addressRule))).toEqual([0, 2, 4, 900, 900])
  })
  it('allows at most 300 guesses a day on one name to whom always waits exactly as long as he must', () => {
    let f: Failures | null = null
    let [now, guesses] = [1e12, 0]
    while (now < 1e12 + 86_400_000) {
      f = failedAgain(f, now)
      guesses++
      now += waitMs(f, nameRule, now)
    }
    expect(guesses).toBeGreaterThan(280)
    expect(guesses).toBeLessThanOrEqual(300)
  })
  it('never grows while nothing happens, never shrinks with one failure more, ends when it said, and is forgotten after a day', () => {
    const any = fc.record({ count: fc.integer({ min: 1, max: 500 }), lastMs: fc.integer({ min: 0, max: 2e12 }) })
    const gap = fc.integer({ min: 0, max: 2 * forgottenMs })
    fc.assert(
      fc.property(any, gap, gap, fc.constantFrom(nameRule, addressRule), (f, a, b, rule) => {
        const now = f.lastMs + a
        const wait = waitMs(f, rule, now)
        expect(wait).toBeLessThanOrEqual(rule.mostMs)
        expect(waitMs(f, rule, now + b)).toBeLessThanOrEqual(wait)
        expect(waitMs(f, rule, now + wait)).toBe(0)
        if (a < forgottenMs) expect(waitMs(failedAgain(f, now), rule, now)).toBeGreaterThanOrEqual(wait)
        expect(waitMs(f, rule, f.lastMs + forgottenMs)).toBe(0)
      }),
    )
  })
})
