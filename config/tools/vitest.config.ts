import { defineConfig } from 'vitest/config'

const nightly = process.env.HOARLINE_NIGHTLY === '1'

export default defineConfig({
  root: new URL('../..', import.meta.url).pathname,
  test: {
    include: ['test/**/*.test.ts', ...(nightly ? ['test/**/*.nightly.ts'] : [])],
    setupFiles: ['test/setup.ts'],
    // Processes, not threads: the fault tests signal and kill, and native SQLite lives in them.
    pool: 'forks',
    maxWorkers: 2,
    testTimeout: 60_000,
    hookTimeout: 120_000,
    reporters: ['default'],
  },
})
