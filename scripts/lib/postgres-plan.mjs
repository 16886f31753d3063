/** Decisions about a PostgreSQL cluster, without touching it. */

/** The newest installed version, or the one an existing cluster was made by. */
export function chooseVersion(installed, clusterVersion) {
  if (clusterVersion !== null) {
    if (installed.includes(clusterVersion)) return clusterVersion
    const have = installed.length === 0 ? 'none is installed' : `installed: ${installed.join(', ')}`
    throw new Error(
      `The database was made by PostgreSQL ${clusterVersion} (${have}): install postgresql-${clusterVersion}, or move the folder away to begin anew.`,
    )
  }
  return [...installed].sort((a, b) => Number(b) - Number(a))[0] ?? null
}

/** Lines of postmaster.pid: pid, data folder, start time in s, port, socket folder, address, shared memory, status. */
export function parsePidFile(text) {
  const lines = text.split('\n').map((line) => line.trim())
  const pid = Number(lines[0])
  const port = Number(lines[3])
  if (!Number.isInteger(pid) || pid <= 0) return null
  return {
    pid,
    dataFolder: lines[1] ?? '',
    port: Number.isInteger(port) && port > 0 ? port : null,
    ready: lines[7] === 'ready',
  }
}

/**
 * `running` is the folder the process of that pid works in, when it is a postgres; null otherwise.
 * PostgreSQL clears a pid file of a dead process itself, but not one whose number was taken over by another
 * process of the same user.
 */
export function planCluster({ initialised, pidFile, running, dataFolder }) {
  if (!initialised) return { action: 'create' }
  if (pidFile === null) return { action: 'start', clearPidFile: false }
  if (running === dataFolder) return { action: 'adopt', pid: pidFile.pid }
  return { action: 'start', clearPidFile: true }
}

/** The first folder on the way that `account` may not pass through; null when the way is free. */
export function firstClosedFolder(folders, account) {
  for (const { path, mode, uid, gid } of folders) {
    const bit = uid === account.uid ? 0o100 : gid === account.gid ? 0o010 : 0o001
    if ((mode & bit) === 0) return path
  }
  return null
}

/** `name:x:uid:gid:…` of /etc/passwd. */
export function parseAccount(passwd, name) {
  const fields = passwd
    .split('\n')
    .map((line) => line.split(':'))
    .find((parts) => parts[0] === name)
  return fields === undefined ? null : { uid: Number(fields[2]), gid: Number(fields[3]), home: fields[5] }
}

/** Where PostgreSQL's tools connect to, by their variables: a command line can be read by everybody on the machine. */
export function clientEnv(env, url) {
  const { hostname, port, username, password, pathname, searchParams } = new URL(url)
  const sslmode = searchParams.get('sslmode')
  return {
    ...env,
    PGHOST: searchParams.get('host') ?? hostname.replace(/^\[|\]$/g, ''),
    PGPORT: port || '5432',
    PGUSER: decodeURIComponent(username),
    PGPASSWORD: decodeURIComponent(password),
    PGDATABASE: decodeURIComponent(pathname.slice(1)),
    ...(sslmode === null ? {} : { PGSSLMODE: sslmode }),
  }
}

/** Unsafe on a crash, and only there: never for a cluster whose data anybody wants back. */
export const TEST_SETTINGS = {
  fsync: 'off',
  synchronous_commit: 'off',
  full_page_writes: 'off',
  max_connections: '300',
  max_wal_size: '256MB',
  autovacuum_naptime: '300s',
}
