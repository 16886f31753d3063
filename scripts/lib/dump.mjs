/** A whole database into one file and back, by PostgreSQL's own tools. */
import { spawn } from 'node:child_process'
import { existsSync, renameSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { run, tailOf } from './commands.mjs'
import { installedVersions } from './postgres.mjs'
import { chooseVersion, clientEnv } from './postgres-plan.mjs'

const VERSIONS_FOLDER = '/usr/lib/postgresql'
/** Nobody but us may read a file with keys and the hashes of passwords. */
const PRIVATE_UMASK = 0o077

/** Of the newest PostgreSQL that is installed: it reads older servers, but not the other way round. */
function tool(name) {
  const version = chooseVersion(installedVersions(), null)
  return version === null ? name : join(VERSIONS_FOLDER, version, 'bin', name)
}

/** Whole or not at all; a file that is there already stays. */
export async function dumpDatabase(url, file) {
  if (existsSync(file)) throw new Error(`${file} is there already: name a file that is not.`)
  const draft = `${file}.part`
  const umask = process.umask(PRIVATE_UMASK)
  try {
    const args = ['--format=custom', '--no-owner', '--no-privileges', `--file=${draft}`]
    await run(tool('pg_dump'), args, { env: clientEnv(process.env, url) })
    renameSync(draft, file)
  } catch (error) {
    rmSync(draft, { force: true })
    throw explained(error)
  } finally {
    process.umask(umask)
  }
}

/** Puts a dump in the place of all there is, in one transaction: either all of it, or nothing has changed. */
export async function restoreDatabase(url, file, { replace }) {
  if (!existsSync(file)) throw new Error(`There is no file ${file}.`)
  // Whether it is a dump at all, before anything is touched.
  await run(tool('pg_restore'), ['--list', file]).catch((error) => {
    throw explained(error)
  })
  await requireRoom(url, replace)
  await pipe(url, file, replace)
}

async function requireRoom(url, replace) {
  const { default: pg } = await import('pg')
  const client = new pg.Client({ connectionString: url, connectionTimeoutMillis: 10_000 })
  await client.connect()
  try {
    const tables = await client.query(
      `select count(*)::int as count from pg_class c join pg_namespace n on n.oid = c.relnamespace
       where c.relkind in ('r', 'p') and n.nspname not in ('pg_catalog', 'information_schema', 'pg_toast')`,
    )
    if (tables.rows[0].count > 0 && !replace)
      throw new Error(
        'The database is not empty. To put the backup in the place of everything in it, add --replace; take a backup of it first.',
      )
    const others = await client.query(
      `select count(*)::int as count from pg_stat_activity
       where datname = current_database() and backend_type = 'client backend' and pid <> pg_backend_pid()`,
    )
    if (others.rows[0].count > 0)
      throw new Error(
        'The database is in use. Stop every web and collector process on it first; for the database of "npm start", stop that.',
      )
  } finally {
    await client.end()
  }
}

/** The end is said only once all has come: psql that hears no end undoes what it did. */
async function pipe(url, file, replace) {
  const options = ['--no-psqlrc', '--quiet', '--set=ON_ERROR_STOP=1', '--output=/dev/null']
  const psql = spawn(tool('psql'), options, {
    env: clientEnv(process.env, url),
    stdio: ['pipe', 'ignore', 'pipe'],
  })
  const dump = spawn(tool('pg_restore'), ['--no-owner', '--no-privileges', '--file=-', file], {
    stdio: ['ignore', 'pipe', 'pipe'],
  })
  const [taken, given] = [ended(psql), ended(dump)]
  // What is written to psql after it has failed is lost, and says nothing new.
  psql.stdin.on('error', () => {})
  psql.stdin.write('begin;\n')
  if (replace) psql.stdin.write(EMPTY)
  dump.stdout.pipe(psql.stdin, { end: false })
  const from = await given
  psql.stdin.end(from.code === 0 ? '\ncommit;\n' : '')
  const to = await taken
  const failed = to.code !== 0 ? to : from.code !== 0 ? from : null
  if (failed) throw new Error(`Nothing was restored.\n${tailOf(failed.errors)}`)
}

const EMPTY = `do $$ declare name text; begin
  for name in select nspname from pg_namespace where nspname !~ '^pg_' and nspname <> 'information_schema' loop
    execute format('drop schema %I cascade', name);
  end loop;
end $$;
create schema public;
`

function ended(child) {
  let errors = ''
  child.stderr.setEncoding('utf8').on('data', (text) => {
    errors += text
  })
  return new Promise((resolve, reject) => {
    child.once('error', (error) => reject(explained(error)))
    child.once('close', (code) => resolve({ code, errors }))
  })
}

function explained(error) {
  if (error.code !== 'ENOENT') return error
  return new Error(
    "PostgreSQL's tools are not installed: install Debian's postgresql-client, no older than the server.",
  )
}
