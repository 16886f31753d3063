/** A PostgreSQL cluster of our own in one folder, on loopback, run by this account or, for root, by `postgres`. */
import { spawn } from 'node:child_process'
import { createHash } from 'node:crypto'
import {
  chmodSync,
  chownSync,
  closeSync,
  existsSync,
  mkdirSync,
  openSync,
  readdirSync,
  readFileSync,
  readlinkSync,
  realpathSync,
  renameSync,
  rmSync,
  statSync,
  writeFileSync,
} from 'node:fs'
import { dirname, join } from 'node:path'
import { setTimeout as delay } from 'node:timers/promises'
import { ensurePackages } from './apt.mjs'
import { run } from './commands.mjs'
import { tryPort } from './ports.mjs'
import {
  chooseVersion,
  firstClosedFolder,
  parseAccount,
  parsePidFile,
  planCluster,
} from './postgres-plan.mjs'
import { endProcess, identify } from './processes.mjs'

const VERSIONS_FOLDER = '/usr/lib/postgresql'
const DRAFT = 'draft-'
const START_PATIENCE_MS = 60_000

export function installedVersions(root = VERSIONS_FOLDER) {
  if (!existsSync(root)) return []
  return readdirSync(root).filter((version) =>
    ['initdb', 'postgres'].every((name) => existsSync(join(root, version, 'bin', name))),
  )
}

/** PostgreSQL refuses to run as root: null means "as who we are". */
export function serverAccount() {
  if (process.getuid() !== 0) return null
  const account = parseAccount(readFileSync('/etc/passwd', 'utf8'), 'postgres')
  if (account === null)
    throw new Error('There is no user "postgres": install Debian\'s postgresql package first.')
  return account
}

/** Where the cluster lives: `wanted`, or where `postgres` can reach it, with the folder that stood in the way. */
export function chooseFolder(wanted, account) {
  mkdirSync(wanted, { recursive: true })
  const path = realpathSync(wanted)
  if (account === null) return { folder: path, closed: null }
  const parents = []
  for (let at = dirname(path); ; at = dirname(at)) {
    const { mode, uid, gid } = statSync(at)
    parents.unshift({ path: at, mode, uid, gid })
    if (at === dirname(at)) break
  }
  const closed = firstClosedFolder(parents, account)
  if (closed === null) return { folder: path, closed }
  const name = `thinspan-${createHash('sha256').update(path).digest('hex').slice(0, 12)}`
  const folder = join(existsSync(account.home) ? account.home : '/var/tmp', name)
  mkdirSync(folder, { recursive: true })
  return { folder, closed }
}

export function locate(wanted) {
  const account = serverAccount()
  return { account, ...chooseFolder(wanted, account) }
}

/**
 * Starts, adopts or makes the cluster; resolves when it answers.
 * @param {{ folder: string, settings?: Record<string, string>, password?: string | null }} init
 */
export async function startCluster({ folder: wanted, settings = {}, password = null }) {
  const { account, folder, closed } = locate(wanted)
  const dataFolder = join(folder, 'data')
  const plan = inspect(dataFolder)
  if (account !== null) chownSync(folder, account.uid, account.gid)
  chmodSync(folder, 0o700)

  if (plan.action === 'adopt') {
    const ready = await untilReady(dataFolder, identify(plan.pid), () => null)
    return cluster({ ...ready, folder, closed, password, how: 'adopted' })
  }
  const versionFile = join(dataFolder, 'PG_VERSION')
  const made = plan.action === 'start' ? readFileSync(versionFile, 'utf8').trim() : null
  const version = chooseVersion(installedVersions(), made)
  if (version === null) throw new Error("PostgreSQL is not installed: install Debian's postgresql package.")
  const bin = join(VERSIONS_FOLDER, version, 'bin')
  if (plan.action === 'create') await create({ bin, folder, dataFolder, account, password })
  if (plan.clearPidFile) rmSync(join(dataFolder, 'postmaster.pid'), { force: true })
  const ready = await launch({ bin, folder, dataFolder, account, settings })
  return cluster({ ...ready, folder, closed, password, how: plan.action === 'create' ? 'made' : 'started' })
}

/** The state of the folder as a plan; never changes anything. */
export function inspect(dataFolder) {
  const pidFile = readPidFile(dataFolder)
  return planCluster({
    initialised: existsSync(join(dataFolder, 'global', 'pg_control')),
    pidFile,
    running: pidFile === null ? null : folderOfPostgres(pidFile.pid),
    dataFolder,
  })
}

/** Debian's package where no PostgreSQL is there; `instead` says how to go without. */
export async function ensurePostgres({ instead, signal }) {
  if (installedVersions().length > 0) return null
  await ensurePackages(['postgresql'], { instead, signal })
  return `installed PostgreSQL ${installedVersions().join(', ')} from Debian's packages`
}

function cluster({ identity, port, folder, closed, password, how }) {
  const login = password === null ? 'postgres' : `postgres:${encodeURIComponent(password)}`
  return {
    how,
    port,
    folder,
    closed,
    identity,
    url: (database) => `postgres://${login}@127.0.0.1:${port}/${database}`,
    /** SIGINT is PostgreSQL's fast shutdown: sessions are ended, data is written. */
    stop: () =>
      endProcess(identity, {
        signals: [
          { name: 'SIGINT', patienceMs: 20_000 },
          { name: 'SIGQUIT', patienceMs: 10_000 },
        ],
      }),
  }
}

async function create({ bin, folder, dataFolder, account, password }) {
  // Renamed into place when whole: what an initdb that was killed leaves looks like a cluster and is none.
  const drafts = readdirSync(folder).filter((name) => name === 'data' || name.startsWith(DRAFT))
  for (const name of drafts) rmSync(join(folder, name), { recursive: true, force: true })
  const draft = join(folder, `${DRAFT}${process.pid}`)
  const options = ['-D', draft, '-U', 'postgres', '-E', 'UTF8', '--locale=C.UTF-8', '--no-instructions']
  const passwordFile = join(folder, 'password')
  if (password !== null) {
    writeFileSync(passwordFile, password, { mode: 0o600 })
    if (account !== null) chownSync(passwordFile, account.uid, account.gid)
  }
  const auth = password === null ? ['-A', 'trust'] : ['-A', 'scram-sha-256', `--pwfile=${passwordFile}`]
  try {
    await run(join(bin, 'initdb'), [...options, ...auth], { cwd: folder, account })
    renameSync(draft, dataFolder)
  } finally {
    rmSync(passwordFile, { force: true })
  }
}

async function launch({ bin, folder, dataFolder, account, settings }) {
  const portFile = join(folder, 'port')
  const remembered = existsSync(portFile) ? Number(readFileSync(portFile, 'utf8')) : 0
  let failure = null
  // A free port can be taken by another program before PostgreSQL has it: try again with another.
  for (let attempt = 0; attempt < 3; attempt += 1) {
    const wanted = attempt === 0 && Number.isInteger(remembered) ? remembered : 0
    const port = (await tryPort(wanted)) ?? (await tryPort(0))
    const logFile = join(folder, 'postgres.log')
    const log = openSync(logFile, 'w', 0o600)
    const options = {
      listen_addresses: '127.0.0.1',
      port: String(port),
      unix_socket_directories: '',
      ...settings,
    }
    const args = Object.entries(options).flatMap(([name, value]) => ['-c', `${name}=${value}`])
    // Detached, or a Ctrl-C in the terminal would reach the database before those who use it.
    const child = spawn(join(bin, 'postgres'), ['-D', dataFolder, ...args], {
      cwd: folder,
      detached: true,
      stdio: ['ignore', log, log],
      ...(account === null ? {} : { uid: account.uid, gid: account.gid }),
    })
    closeSync(log)
    let ended = null
    child.once('error', (error) => {
      ended = error.message
    })
    child.once('exit', (code, signal) => {
      ended = `ended with ${signal ?? code}`
    })
    child.unref()
    try {
      const ready = await untilReady(
        dataFolder,
        child.pid === undefined ? null : identify(child.pid),
        () => ended,
      )
      writeFileSync(portFile, String(ready.port))
      return ready
    } catch (error) {
      const tail = readFileSync(logFile, 'utf8').trim().split('\n').slice(-8).join('\n')
      failure = new Error(`${error.message}\n${tail}`)
      if (!tail.includes('could not bind')) break
    }
  }
  throw failure
}

async function untilReady(dataFolder, identity, ended) {
  const deadlineMs = performance.now() + START_PATIENCE_MS
  for (;;) {
    const state = readPidFile(dataFolder)
    if (state?.ready && state.pid === identity?.pid && state.port !== null)
      return { identity, port: state.port }
    if (ended() !== null) throw new Error(`PostgreSQL ${ended()}.`)
    if (performance.now() > deadlineMs) throw new Error('PostgreSQL did not get ready within 60 s.')
    await delay(20)
  }
}

export function readPidFile(dataFolder) {
  try {
    return parsePidFile(readFileSync(join(dataFolder, 'postmaster.pid'), 'utf8'))
  } catch (error) {
    if (error.code === 'ENOENT') return null
    throw error
  }
}

/** PostgreSQL works in its data folder: that tells ours from any other postgres. */
function folderOfPostgres(pid) {
  try {
    if (readFileSync(`/proc/${pid}/comm`, 'utf8').trim() !== 'postgres') return null
    return readlinkSync(`/proc/${pid}/cwd`)
  } catch {
    return null
  }
}
