import { readFile } from 'node:fs/promises'
import { type Commissioning, knowledgeOf } from './core/baseline/record.ts'
import type { StartingKnowledge } from './core/baseline/starting-knowledge.ts'
import { MonitorError } from './core/errors.ts'
import type { Skid } from './core/skid.ts'
import { cannotRead } from './file-trouble.ts'

const isNumber = (x: unknown): x is number => typeof x === 'number' && Number.isFinite(x)

/** What is wrong with a record, null where nothing is: only what a run takes from it is looked at. */
function wrongWith(x: unknown, skid: Skid): string | null {
  const r = x as Partial<Commissioning> | null
  if (typeof r !== 'object' || r === null || r.commissioning !== 1 || !Array.isArray(r.segments)) return 'no record of a step test'
  if (r.skid !== skid.skid) return `the record is of skid '${String(r.skid)}', this one is '${skid.skid}'`
  for (const s of r.segments) {
    if (typeof s?.segment !== 'string' || !Array.isArray(s.criteria)) return 'a segment without name or criteria'
    if (s.zero !== null && !isNumber(s.zero?.mbar)) return `segment ${s.segment}: zero.mbar is no number`
    if (s.exponent !== null && !(isNumber(s.exponent?.over) && isNumber(s.exponent.sd) && s.exponent.sd > 0))
      return `segment ${s.segment}: exponent.over or exponent.sd is no number`
  }
  return null
}

/** The accepted values of a record that `commission --json` wrote. Errors: FILE_READ, BASELINE_FILE with the file. */
export async function loadCommissioning(file: string, skid: Skid): Promise<StartingKnowledge[]> {
  let text: string
  try {
    text = await readFile(file, 'utf8')
  } catch (cause) {
    throw cannotRead(file, cause)
  }
  let record: unknown = null
  try {
    record = JSON.parse(text)
  } catch {
    record = null
  }
  const wrong = wrongWith(record, skid)
  if (wrong !== null)
    throw new MonitorError('BASELINE_FILE', wrong, {
      place: { file },
      hint: 'clearbore commission LOG.csv --skid FILE --json OUT makes one',
    })
  return knowledgeOf(record as Commissioning, skid)
}
