import { expect, it } from 'vitest'
import { damageRounds } from '../store/damage.ts'

it('never reads other readings out of a file damaged in 1,000 ways', () => {
  const { said } = damageRounds(1000, 77)
  console.log(`4 questions to each of 1,000 damaged files: ${said} refused, the others answered as before`)
  expect(said).toBeGreaterThan(1000)
}, 1_800_000)
