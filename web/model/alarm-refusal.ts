/** What to do about a refusal, by its reason as the alarm journal gives it. */
const mends: readonly (readonly [RegExp, string])[] = [
  [/a reason of at least/, 'say in a few words why'],
  [/still active/, 'a reset waits until the condition is gone'],
  [/acknowledge first/, 'acknowledge it, then reset it'],
  [/nothing is latched/, 'there is nothing to reset'],
  [/this class may not be shelved/, 'answer it, or have it taken out of service by somebody who may'],
  [/at most .* min at once/, 'choose a shorter time; it can be extended before it ends'],
  [/at most .* h in all/, 'let it come back, or have it taken out of service by somebody who may'],
  [/a duration is required/, 'give the minutes'],
  [/not while (SHELVED|SBD|OOS)/, 'it is put aside: end that first'],
  [/not the latest of its kind/, 'act on the newest alarm of its kind'],
  [/only an (identified|authorised) person/, 'say who you are in the top strip'],
  [/already|nothing to acknowledge|not shelved|not out of service/, 'the list shows how it stands now'],
]

/** A refusal with its mend, as one sentence; the reason alone where there is nothing to do about it. */
export function refusalText(reason: string): string {
  // What was asked for stands in the form still.
  const why = reason.replace(/ \(asked: .*\)$/s, '')
  const mend = mends.find(([test]) => test.test(why))?.[1]
  return `refused: ${why}${mend === undefined ? '' : ` – ${mend}`}`
}

/** Reasons to pick from; the words are added to. */
export const asideReasons = [
  'instrument under repair',
  'known cause, being worked on',
  'test or calibration under way',
  'start-up or flush under way',
] as const

/** The reason that goes into the record: what was picked, and what was written besides. */
export const reasonOf = (picked: string, written: string): string => [picked, written.trim()].filter((t) => t !== '').join(': ')
