import { afterAll, expect, it } from 'vitest'
import { tempDir } from '../monitor/bench.ts'
import { bundled, dropBundles } from './children.ts'
import { killRounds } from './killing.ts'

afterAll(dropBundles)

it('killed at 4 moments while ingesting and being acted on, loses nothing acknowledged, doubles nothing, and reports as if undisturbed', async () => {
  const found = await killRounds(bundled('tests/e2e-server/serving-child.ts'), tempDir(), 4, 11)
  console.log(`4 kills: ${found.rows} rows, ${found.acts} acts acknowledged, ${found.unacknowledged} on disk that were not yet`)
  expect(found.acts).toBeGreaterThanOrEqual(8)
  expect(found.rows).toBeGreaterThan(300)
})
