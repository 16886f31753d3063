/** The product's own database and login inside a cluster of ours. */

const WRONG_PASSWORD_CODES = new Set(['28P01', '28000'])

/** A server of somebody else's: answers to its address, or says why not. */
export async function requireDatabase(url) {
  const { default: pg } = await import('pg')
  let client
  try {
    client = new pg.Client({ connectionString: url, connectionTimeoutMillis: 10_000 })
    await client.connect()
    const { rows } = await client.query('show server_version')
    return `PostgreSQL ${rows[0].server_version} at DATABASE_URL`
  } catch (error) {
    const why = error.message || error.code
    throw new Error(
      `DATABASE_URL does not lead to a database (${why}): correct it, or leave it out for one of our own.`,
    )
  } finally {
    await client?.end().catch(() => {})
  }
}

/** Makes login and database of one name where missing; resolves to whether it made the database. */
export async function ensureDatabase(adminUrl, { name, password, secretsFolder }) {
  // Only now: packages may just have been installed.
  const { default: pg } = await import('pg')
  const admin = new pg.Client({ connectionString: adminUrl, connectionTimeoutMillis: 10_000 })
  try {
    await admin.connect()
  } catch (error) {
    if (!WRONG_PASSWORD_CODES.has(error.code)) throw error
    throw new Error(
      `The database does not take the password in ${secretsFolder}/secrets.json: restore that file, or move the folder away to begin anew.`,
    )
  }
  try {
    const login = admin.escapeIdentifier(name)
    const roles = await admin.query('select 1 from pg_roles where rolname = $1', [name])
    const verb = roles.rowCount === 0 ? 'create' : 'alter'
    await admin.query(`${verb} role ${login} login password ${admin.escapeLiteral(password)}`)
    const databases = await admin.query('select 1 from pg_database where datname = $1', [name])
    if (databases.rowCount > 0) return false
    await admin.query(`create database ${login} owner ${login}`)
    return true
  } finally {
    await admin.end()
  }
}
