import { expect, it } from 'vitest'
import { killRounds } from './killing.ts'

it('loses nothing acknowledged and doubles nothing when its process is killed at 6 moments while appending, importing and packing', async () => {
  const { entries } = await killRounds(6, 20)
  expect(entries).toBeGreaterThan(1000)
})
