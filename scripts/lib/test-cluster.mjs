/** The cluster of the tests, in .thinspan-test: shared by whatever runs tests in this checkout, stopped by the last. */
import { readdirSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { makeFolder, PASS_THROUGH } from './folders.mjs'
import { returnLease, takeLease } from './leases.mjs'
import { withLock } from './lock.mjs'
import { inspect, locate, startCluster } from './postgres.mjs'
import { TEST_SETTINGS } from './postgres-plan.mjs'

/** The build of the end-to-end tests; `npm start` has its own. */
export const TEST_DIST_FOLDER = '.next-test'

/** Runs that were killed leave their databases behind; past this many the cluster is made anew. */
const DATABASES_AT_MOST = 40

export function testFolder(root) {
  return makeFolder(join(root, '.thinspan-test'), PASS_THROUGH)
}

/** Resolves to { url, how, port, closed, close }. */
export async function openTestCluster(root) {
  const folder = testFolder(root)
  const leases = join(folder, 'users')
  return withLock(folder, async () => {
    const cluster = await startTestCluster(join(folder, 'postgres'))
    const lease = takeLease(leases)
    return {
      url: cluster.url('postgres'),
      how: cluster.how,
      port: cluster.port,
      closed: cluster.closed,
      close: () =>
        withLock(folder, async () => {
          if (returnLease(leases, lease) === 0) await cluster.stop()
        }),
    }
  })
}

async function startTestCluster(wanted) {
  const dataFolder = join(locate(wanted).folder, 'data')
  const { action } = inspect(dataFolder)
  if (action !== 'start') return startCluster({ folder: wanted, settings: TEST_SETTINGS })
  if (readdirSync(join(dataFolder, 'base')).length > DATABASES_AT_MOST)
    rmSync(dataFolder, { recursive: true })
  try {
    return await startCluster({ folder: wanted, settings: TEST_SETTINGS })
  } catch {
    // Without fsync a crash of the machine can leave it past repair, and nothing in it is worth keeping.
    rmSync(dataFolder, { recursive: true, force: true })
    return startCluster({ folder: wanted, settings: TEST_SETTINGS })
  }
}
