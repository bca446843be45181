import { expect, it } from 'vitest'
// @ts-expect-error a script of the package, plain JavaScript
import { unusedExports } from '../scripts/unused.js'

/** What may stay though the product does not use it, and why. */
const exceptions: Readonly<Record<string, string>> = {
  'server/core/detectors/index.ts detectors':
    'the list that puts every detector through the same contract, those for comparison too',
}

it('no function or constant of the core is used by tests alone, nor exported without need; node scripts unused lists them', () => {
  const found = (unusedExports() as { file: string; name: string; kind: string }[]).map((u) => `${u.file} ${u.name}`)
  expect(found.filter((u) => exceptions[u] === undefined)).toEqual([])
  expect(Object.keys(exceptions).filter((u) => !found.includes(u))).toEqual([])
})
