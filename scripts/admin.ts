/**
 * npm run --silent admin -- user create --email E --name N --team T --role owner --password P
 * npm run --silent admin -- token create --email E --scope read|write [--team SLUG]
 * Prints one JSON object; on failure one on standard error, with exit code 1.
 */
import { resolve } from 'node:path'
import { runAdminCommand } from '@/lib/data/admin-commands'
import { closeDatabase } from '@/lib/db'
import { toProblem } from '@/lib/http/problem'
import { getRuntime } from '@/lib/http/runtime'
import { dataFolderOf, findOwnDatabase } from './lib/own-database.mjs'

const silent = { info: () => {}, warn: () => {}, error: () => {} }

// Beside a running `npm start` the command needs no address.
process.env.DATABASE_URL ||=
  findOwnDatabase(dataFolderOf(process.env, resolve(import.meta.dirname, '..'))) ?? ''

try {
  const result = await runAdminCommand({ ...getRuntime(), log: silent }, process.argv.slice(2))
  process.stdout.write(`${JSON.stringify(result)}\n`)
} catch (error) {
  const { code, detail, errors } = toProblem(error)
  // Whoever can run this may see what the web must not show.
  const cause = code === 'internal' && error instanceof Error ? { cause: error.message } : {}
  process.stderr.write(`${JSON.stringify({ code, detail, errors, ...cause })}\n`)
  process.exitCode = 1
} finally {
  await closeDatabase()
}
