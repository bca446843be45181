import { defineConfig } from 'vitest/config'

// One file at a time: some measure memory and time.
export default defineConfig({
  test: {
    setupFiles: ['tests/setup.ts'],
    include: ['tests/soak/**/*.test.ts'],
    testTimeout: 3_600_000,
    hookTimeout: 600_000,
    pool: 'forks',
    fileParallelism: false,
  },
})
