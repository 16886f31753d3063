/** The database that commands beside a server work on: DATABASE_URL, or our own, which is started if it does not run. */
import { existsSync } from 'node:fs'
import { join } from 'node:path'
import { ensureDatabase } from './database.mjs'
import { makeFolder, PASS_THROUGH } from './folders.mjs'
import { withLock } from './lock.mjs'
import { dataFolderOf, findOwnDatabase, LOGIN, ownDatabaseUrl } from './own-database.mjs'
import { startCluster } from './postgres.mjs'
import { loadSecrets } from './secrets.mjs'

/**
 * Resolves to { url, close }; `close` stops what was started. With `make` a data folder that is not there is made.
 * @param {NodeJS.ProcessEnv} env
 * @param {string} root
 * @param {{ make: boolean }} options
 */
export async function openDatabaseAtHand(env, root, { make }) {
  const nothing = async () => {}
  if (env.DATABASE_URL) return { url: env.DATABASE_URL, close: nothing }
  const dataFolder = dataFolderOf(env, root)
  const running = findOwnDatabase(dataFolder)
  if (running !== null) return { url: running, close: nothing }
  if (!make && !existsSync(join(dataFolder, 'postgres')))
    throw new Error(`There is no database in ${dataFolder}: set DATABASE_URL or THINSPAN_DATA_DIR.`)
  makeFolder(dataFolder, PASS_THROUGH)
  const { databasePassword: password } = loadSecrets(dataFolder)
  const folder = join(dataFolder, 'postgres')
  const cluster = await withLock(folder, () => startCluster({ folder, settings: {}, password }))
  try {
    await ensureDatabase(cluster.url('postgres'), { name: LOGIN, password, secretsFolder: dataFolder })
  } catch (error) {
    await cluster.stop()
    throw error
  }
  return { url: ownDatabaseUrl(cluster.port, password), close: () => cluster.stop() }
}
