import { defineConfig } from 'vitest/config'

const alias = {
  '@': import.meta.dirname,
  'server-only': `${import.meta.dirname}/tests/support/server-only.ts`,
}
const database = 'tests/support/global-setup.ts'
const build = 'tests/support/global-setup-build.ts'

/** Hours-long courses: only by `npm run soak`. */
const soak = {
  extends: true as const,
  test: {
    name: 'soak',
    include: ['tests/soak/**/*.test.ts'],
    globalSetup: ['tests/support/global-setup.ts'],
    testTimeout: 3_600_000,
  },
}

/** What a project does not need (a database, a build) it does not wait for, not even when run by file name. */
export default defineConfig({
  resolve: { alias },
  test: {
    passWithNoTests: false,
    projects: [
      ...(process.env.THINSPAN_SOAK ? [soak] : []),
      {
        extends: true,
        test: {
          name: 'quick',
          include: ['tests/{unit,property,reference,contract}/**/*.test.ts'],
          sequence: { groupOrder: 0 },
        },
      },
      {
        extends: true,
        test: {
          name: 'integration',
          include: ['tests/integration/**/*.test.ts'],
          globalSetup: [database],
          testTimeout: 30_000,
          hookTimeout: 60_000,
          sequence: { groupOrder: 1 },
        },
      },
      {
        extends: true,
        test: {
          name: 'e2e',
          include: ['tests/e2e/**/*.test.ts'],
          globalSetup: [database, build],
          env: { THINSPAN_DIST_DIR: '.next-test' },
          testTimeout: 120_000,
          hookTimeout: 120_000,
          // Each has browsers, servers and a fleet of its own: side by side they would only wait for one another.
          fileParallelism: false,
          maxWorkers: 1,
          sequence: { groupOrder: 2 },
        },
      },
    ],
  },
})
