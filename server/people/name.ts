import { MonitorError } from '../core/errors.ts'

/** Names that the trail gives to what is no person. */
const taken = new Set(['demo operator', 'nobody', 'at the machine', 'clearbore', 'system'])
/** Scripts whose letters look alike: a name keeps to one of them. */
const alike = [/\p{Script=Latin}/u, /\p{Script=Cyrillic}/u, /\p{Script=Greek}/u]

/** Under which two spellings are one name: compatibility forms, case and white space do not tell people apart. */
export const nameKey = (name: string): string => fold(fold(name)).trim().replace(/\s+/gu, ' ')
const fold = (text: string): string => text.normalize('NFKC').toUpperCase().toLowerCase().normalize('NFKC')

/** A name as it is kept. Errors: PERSON_REFUSED for what is no name of a person. */
export function nameOf(text: string): string {
  const name = text.normalize('NFC').trim().replace(/\s+/gu, ' ')
  const refuse = (why: string) =>
    new MonitorError('PERSON_REFUSED', `this is no name to sign with: ${why}`, { hint: 'give another' })
  if ([...name].length < 2 || [...name].length > 60) throw refuse('it needs 2 to 60 characters')
  if (!/^[\p{L}\p{N}][\p{L}\p{M}\p{N} .,'’_-]*$/u.test(name) || !/\p{L}/u.test(name))
    throw refuse("letters, digits, spaces and . , ' _ - make a name, and a letter or digit begins it")
  if (alike.filter((script) => script.test(name.normalize('NFKC'))).length > 1)
    throw refuse('it mixes letters of scripts that look alike')
  if (taken.has(nameKey(name))) throw refuse('it stands for no person')
  return name
}
