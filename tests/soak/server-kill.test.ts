import { afterAll, expect, it } from 'vitest'
import { bundled, dropBundles } from '../e2e-server/children.ts'
import { killRounds } from '../e2e-server/killing.ts'
import { tempDir } from '../monitor/bench.ts'

afterAll(dropBundles)

it('killed at 200 moments, ten to a run, loses nothing acknowledged, doubles nothing, and reports as if undisturbed', async () => {
  const server = bundled('tests/e2e-server/serving-child.ts')
  const sum = { rows: 0, acts: 0, unacknowledged: 0 }
  for (let seed = 1; seed <= 20; seed++) {
    const found = await killRounds(server, tempDir(), 10, seed)
    sum.rows += found.rows
    sum.acts += found.acts
    sum.unacknowledged += found.unacknowledged
  }
  console.log(`200 kills: ${sum.rows} rows, ${sum.acts} acts acknowledged, ${sum.unacknowledged} on disk that were not yet`)
  expect(sum.acts).toBeGreaterThan(400)
}, 3_600_000)
