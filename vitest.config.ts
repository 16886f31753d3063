import { defineConfig } from 'vitest/config'
import { BaseSequencer, type TestSpecification } from 'vitest/node'

const alias = {
  '@': import.meta.dirname,
  'server-only': `${import.meta.dirname}/tests/support/server-only.ts`,
}
/** They take longest by far: begun last, one of them would go on alone at the end. */
const LONGEST = ['tests/e2e/namespaces.test.ts', 'tests/unit/method/simulate-traps.test.ts']

class LongestFirst extends BaseSequencer {
  override async sort(files: TestSpecification[]): Promise<TestSpecification[]> {
    const sorted = await super.sort(files)
    const isLong = ({ moduleId }: TestSpecification) => LONGEST.some((path) => moduleId.endsWith(path))
    return [...sorted.filter(isLong), ...sorted.filter((file) => !isLong(file))]
  }
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

/** For what hangs: tests wait for events, and say after less than this which one did not come (tests/support/until.ts). */
const HANG_MS = 240_000
/** Where a test has several such waits one after the other. */
const LONG_HANG_MS = 600_000

/** These replace modules, or wait most of the time while others run: each in a process of its own. */
const apart = ['tests/integration/actions-people.test.ts', 'tests/e2e/namespaces.test.ts']

/** What a project does not need (a database, a build) it does not wait for, not even when run by file name. */
export default defineConfig({
  resolve: { alias },
  test: {
    passWithNoTests: false,
    testTimeout: HANG_MS,
    hookTimeout: HANG_MS,
    setupFiles: ['tests/support/fixed-seed.ts'],
    sequence: { sequencer: LongestFirst },
    projects: [
      ...(process.env.THINSPAN_SOAK ? [soak] : []),
      {
        extends: true,
        test: {
          name: 'quick',
          include: ['tests/{unit,property,reference,contract}/**/*.test.ts'],
          // Half of the time went into loading the same modules for every file.
          pool: 'threads',
          isolate: false,
          sequence: { groupOrder: 0 },
        },
      },
      {
        extends: true,
        test: {
          name: 'integration',
          include: ['tests/integration/**/*.test.ts'],
          exclude: apart,
          isolate: false,
          globalSetup: [database],
          maxWorkers: 3,
          sequence: { groupOrder: 1 },
        },
      },
      {
        extends: true,
        test: {
          name: 'apart',
          include: apart,
          globalSetup: [database],
          testTimeout: LONG_HANG_MS,
          maxWorkers: 3,
          sequence: { groupOrder: 1 },
        },
      },
      {
        extends: true,
        test: {
          name: 'e2e',
          include: ['tests/e2e/**/*.test.ts'],
          exclude: apart,
          globalSetup: [database, build],
          env: { THINSPAN_DIST_DIR: '.next-test' },
          testTimeout: LONG_HANG_MS,
          // Each has browsers, servers and a fleet of its own: side by side they would only wait for one another.
          fileParallelism: false,
          maxWorkers: 1,
          sequence: { groupOrder: 2 },
        },
      },
    ],
  },
})
