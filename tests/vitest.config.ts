import { defineConfig } from 'vitest/config'

/** Pages, servers and sockets, which wait for each other by the clock: one after the other, when the rest is done. */
const timed = ['tests/browser/**/*.test.ts', 'tests/e2e-server/**/*.test.ts', 'tests/live/**/*.test.ts']

export default defineConfig({
  test: {
    testTimeout: 60_000,
    hookTimeout: 60_000,
    pool: 'forks',
    setupFiles: ['tests/setup.ts'],
    projects: [
      {
        extends: true,
        test: {
          name: 'computed',
          include: ['tests/**/*.test.ts'],
          exclude: ['tests/soak/**', 'tests/bench/**', ...timed],
          maxWorkers: 2,
          sequence: { groupOrder: 0 },
        },
      },
      { extends: true, test: { name: 'timed', include: timed, maxWorkers: 1, sequence: { groupOrder: 1 } } },
    ],
  },
})
