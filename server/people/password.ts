import { MonitorError } from '../core/errors.ts'
import { nameKey } from './name.ts'

/*
 * After NIST SP 800-63B (revision 4, from memory): length instead of composition, at least 15 characters where the password is all there
 * is, at least 64 to be allowed, spaces and every script too, nothing well known or taken from the context. No expiry.
 */
export const leastLength = 15
export const mostLength = 256
/** So much must be left when everything well known is taken away. */
const leastOwn = 8

/** What people take first, long ones before their parts. */
const known = [
  'password', 'passwort', 'passw0rd', 'p@ssw0rd', 'p@ssword', 'motdepasse', 'contrasena', 'qwertyuiop', 'qwertzuiop', 'azertyuiop', 'asdfghjkl',
  'zxcvbnm', 'yxcvbnm', 'qwerty', 'qwertz', 'azerty', 'asdfgh', 'administrator', 'welcome', 'willkommen', 'changeme', 'letmein', 'iloveyou', 'football',
  'sunshine', 'princess', 'superman', 'batman', 'dragon', 'monkey', 'secret', 'geheim', 'master', 'trustno1', 'abc123', 'operator', 'engineer', 'reviewer',
  'viewer', 'admin', 'login', 'clearbore', 'default', 'test', 'demo', 'pass',
] as const // biome-ignore format: a list

/** Under which a password is computed on: the same key strokes on another keyboard or system give the same. */
export const passwordText = (password: string): string => password.normalize('NFKC')

/** What is left of a text without runs like 1234, cba or aaa. */
function withoutRuns(text: string): string {
  const codes = [...text].map((c) => c.codePointAt(0)!)
  const isRun = (i: number): boolean => {
    const step = codes[i]! - codes[i - 1]!
    return Math.abs(step) <= 1 && codes[i - 1]! - codes[i - 2]! === step
  }
  return [...text].filter((_, i) => ![i, i + 1, i + 2].some((k) => k >= 2 && k < codes.length && isRun(k))).join('')
}

/** Errors: PERSON_REFUSED with what is wrong with a password that `name` wants to take. The password is in no message. */
export function checkPassword(password: string, name: string): void {
  const refuse = (why: string) =>
    new MonitorError('PERSON_REFUSED', `the password ${why}`, {
      hint: 'four or five words that have nothing to do with each other do',
    })
  const text = passwordText(password)
  const length = [...text].length
  if (length < leastLength) throw refuse(`needs at least ${leastLength} characters, got ${length}`)
  if (length > mostLength) throw refuse(`may have at most ${mostLength} characters, got ${length}`)
  if (new Set(text.toLowerCase()).size < 6) throw refuse('has fewer than 6 different characters')
  let own = nameKey(text).replaceAll(' ', '')
  const names = [nameKey(name), ...nameKey(name).split(/[^\p{L}\p{N}]+/u)]
    .map((n) => n.replaceAll(' ', ''))
    .filter((n) => n.length > 2)
  for (const word of [...names.sort((a, b) => b.length - a.length), ...known]) own = own.replaceAll(word, '')
  if ([...withoutRuns(own)].length < leastOwn)
    throw refuse('is made of the name, of well-known passwords or of runs like 1234, and of little else')
}
