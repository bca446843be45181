import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import fc from 'fast-check'
import { afterAll } from 'vitest'

// Every property draws the same cases each time, so that a red test is red for its change and not for its luck. FC_SEED draws others.
fc.configureGlobal({ seed: Number(process.env['FC_SEED'] ?? 20310505) })

// Keys of the stores that child processes open go with the test file, not into this user's folder.
const keys = mkdtempSync(join(tmpdir(), 'clearbore-keys-'))
process.env['CLEARBORE_KEYS'] = keys
afterAll(() => rmSync(keys, { recursive: true, force: true }))
