import { expect, it } from 'vitest'
import { killRounds } from '../store/killing.ts'

it('loses nothing acknowledged and doubles nothing when its process is killed at 200 moments while appending, importing and packing', async () => {
  let entries = 0
  let unacknowledged = 0
  for (let seed = 1; seed <= 20; seed++) {
    const found = await killRounds(10, seed)
    entries += found.entries
    unacknowledged += found.unacknowledged
  }
  console.log(`200 kills: ${entries} entries, ${unacknowledged} times a commit was on disk that was not yet acknowledged`)
  expect(entries).toBeGreaterThan(20_000)
}, 1_800_000)
