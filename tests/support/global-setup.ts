/** A PostgreSQL server for the tests that need one: TEST_DATABASE_URL, else our own cluster, else a container. */
import { resolve } from 'node:path'
import { fileURLToPath } from 'node:url'
import { installedVersions } from '@/scripts/lib/postgres.mjs'
import { openTestCluster } from '@/scripts/lib/test-cluster.mjs'

const root = resolve(fileURLToPath(import.meta.url), '../../..')
let shared: Promise<() => Promise<void>> | undefined
let users = 0

/** Several vitest projects may ask; the last to leave ends it. */
export async function setup(): Promise<void> {
  users += 1
  shared ??= start()
  await shared
}

export async function teardown(): Promise<void> {
  users -= 1
  if (users === 0) await (await shared)?.()
}

async function start(): Promise<() => Promise<void>> {
  if (process.env.TEST_DATABASE_URL) return async () => {}
  const server = installedVersions().length > 0 ? await openTestCluster(root) : await startContainer()
  process.env.TEST_DATABASE_URL = server.url
  return async () => {
    delete process.env.TEST_DATABASE_URL
    await server.close()
  }
}

async function startContainer() {
  const { PostgreSqlContainer } = await import('@testcontainers/postgresql')
  try {
    const container = await new PostgreSqlContainer('postgres:15-alpine').start()
    return { url: container.getConnectionUri(), close: async () => void (await container.stop()) }
  } catch (error) {
    const why = error instanceof Error ? error.message : String(error)
    throw new Error(
      `There is no PostgreSQL for the tests: install Debian's postgresql package, set TEST_DATABASE_URL, or run "npm test". (A container did not start: ${why})`,
    )
  }
}
