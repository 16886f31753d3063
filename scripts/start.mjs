#!/usr/bin/env node
/** `npm start`: everything Thinspan needs on this machine, then Thinspan, then the demo. Composition root. */
import { existsSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { setTimeout as delay } from 'node:timers/promises'
import { ensureAgentFile } from './lib/agent-file.mjs'
import { ensureBuilt, nextProgram } from './lib/build.mjs'
import { createChildren } from './lib/children.mjs'
import { run } from './lib/commands.mjs'
import { ensureDatabase, requireDatabase } from './lib/database.mjs'
import { formatSignIns, parseDemoLine } from './lib/demo-lines.mjs'
import { fakesEnv, fakesSentence, fakesWanted, parseFakesLine } from './lib/fakes.mjs'
import { makeFolder, PASS_THROUGH, PRIVATE } from './lib/folders.mjs'
import { ensureInstalled } from './lib/install.mjs'
import { withLock } from './lib/lock.mjs'
import { freeMemoryBytes, memorySentence } from './lib/memory.mjs'
import { describeMigrations } from './lib/migrations.mjs'
import { requireNode } from './lib/node-version.mjs'
import { dataFolderOf, LOGIN, ownDatabaseUrl } from './lib/own-database.mjs'
import { parsePort, requirePort } from './lib/ports.mjs'
import { ensurePostgres, startCluster } from './lib/postgres.mjs'
import { isAlive, launchersOf } from './lib/processes.mjs'
import { endLeftovers, findLeftovers } from './lib/run-file.mjs'
import { loadSecrets } from './lib/secrets.mjs'
import { createSteps } from './lib/steps.mjs'
import { addressesOf, untilHealthy } from './lib/web.mjs'

const DIST_FOLDER = '.next'
const HEALTH_PATIENCE_MS = 60_000
const DEMO_PATIENCE_MS = 90_000
const DATABASE_SETTINGS = { max_connections: '100', shared_buffers: '128MB' }

const root = resolve(import.meta.dirname, '..')
const env = process.env
const say = (text) => process.stdout.write(text)
const stopping = new AbortController()
const { signal } = stopping
/** What to undo, last first. */
const undo = []

async function main() {
  const unknown = process.argv.slice(2).filter((arg) => arg !== '--no-demo')
  if (unknown.length > 0) throw new Error(`npm start knows --no-demo only, not ${unknown.join(' ')}.`)
  requireNode(process.versions.node)
  const withDemo = !process.argv.includes('--no-demo')
  const port = parsePort(env.PORT, 3000)
  const host = env.HOST || '127.0.0.1'
  const dataFolder = makeFolder(dataFolderOf(env, root), PASS_THROUGH)
  const logFolder = makeFolder(join(dataFolder, 'log'), PRIVATE)
  const runFile = join(dataFolder, 'run.json')
  const { local, shown } = addressesOf(host, port)
  const { step, note, total } = createSteps({ write: say, nowMs: () => performance.now() })

  const children = await withLock(dataFolder, async () => {
    const left = await findLeftovers(runFile)
    if (left.length > 0) await step('Left by a killed start', () => endLeftovers(left))
    await requirePort(port, host)
    return createChildren({ runFile, logFolder, address: shown })
  })
  undo.push(() => children.stop())

  await step('Packages', () => ensureInstalled(root, { signal }))
  const secrets = loadSecrets(dataFolder)
  if (env.DATABASE_URL) await step('Database', () => requireDatabase(env.DATABASE_URL))
  const databaseUrl = env.DATABASE_URL || (await ownDatabase({ step, note, dataFolder, secrets }))
  const childEnv = {
    ...env,
    DATABASE_URL: databaseUrl,
    NEXT_TELEMETRY_DISABLED: '1',
    NODE_ENV: 'production',
    PORT: String(port),
    THINSPAN_DATA_DIR: dataFolder,
    THINSPAN_DIST_DIR: DIST_FOLDER,
    THINSPAN_SECRET: env.THINSPAN_SECRET || secrets.serverSecret,
    THINSPAN_URL: local,
  }
  await step('Migrations', async () => {
    const { output } = await run(process.execPath, tsx('scripts/migrate.ts'), {
      cwd: root,
      env: childEnv,
      signal,
    })
    return describeMigrations(output)
  })
  await step('Build', async () => {
    const sentence = memorySentence(freeMemoryBytes())
    const options = { distFolder: DIST_FOLDER, signal, onStart: () => sentence && note(sentence) }
    return ensureBuilt(root, options)
  })
  await step('Agent file', () => ensureAgentFile(root))

  const fakes = fakesWanted(env)
  const hasFakes = fakes.mail || fakes.sms
  if (hasFakes) Object.assign(childEnv, await startFakes({ step, children, childEnv }))

  const next = [nextProgram(root), 'start', '-H', host, '-p', String(port)]
  const web = children.start('web', next, { cwd: root, env: childEnv })
  await step('Web server', async () => {
    const options = { ended: () => web.ended, patienceMs: HEALTH_PATIENCE_MS, signal }
    await untilHealthy(`${local}/api/health`, options).catch((error) => {
      signal.throwIfAborted()
      throw new Error(`${error.message} The end of ${logFolder}/web.log:\n${web.logTail()}`)
    })
    return 'healthy'
  })
  const signIns = withDemo ? await startDemo({ step, note, children, childEnv }) : []

  say(`\nThinspan is at ${shown} (after ${total()}).\n`)
  if (signIns.length > 0) say(`\nDemo sign-ins:\n${formatSignIns(signIns).join('\n')}\n`)
  else say('Open it in a browser: on a new server the first page creates the owner.\n')
  if (hasFakes) say(`\n${fakesSentence(env, shown)}\n`)
  say(`\nStop with Ctrl-C. Data is in ${dataFolder}, logs are in ${logFolder}.\n`)

  const how = await Promise.race([web.end, aborted()])
  signal.throwIfAborted()
  throw new Error(`The web server ${how}. The end of ${logFolder}/web.log:\n${web.logTail()}`)
}

/** A cluster of our own; resolves to the address of the database in it. */
async function ownDatabase({ step, note, dataFolder, secrets }) {
  const instead = 'set DATABASE_URL to a server you have'
  await step('PostgreSQL package', () => ensurePostgres({ instead, signal }))
  let url
  await step('Database', async () => {
    const folder = join(dataFolder, 'postgres')
    const password = secrets.databasePassword
    const cluster = await withLock(folder, () =>
      startCluster({ folder, settings: DATABASE_SETTINGS, password }),
    )
    undo.unshift(() => cluster.stop())
    if (cluster.closed !== null) {
      note(`User "postgres" may not pass through ${cluster.closed}, so the database is in ${cluster.folder}.`)
    }
    const login = { name: LOGIN, password, secretsFolder: dataFolder }
    await ensureDatabase(cluster.url('postgres'), login)
    url = ownDatabaseUrl(cluster.port, password)
    watchDatabase(cluster.identity)
    return `${cluster.how}, port ${cluster.port}`
  })
  return url
}

async function watchDatabase(identity) {
  while (isAlive(identity)) {
    await delay(2_000, undefined, { signal, ref: false }).catch(() => {})
    if (signal.aborted) return
  }
  stopping.abort(new Error('The database ended: see postgres.log beside its data, then start again.'))
}

/** Stand-ins for what is not set up; resolves to the variables that name them. */
async function startFakes({ step, children, childEnv }) {
  let said
  await step('Stand-ins', async () => {
    let markReady
    const ready = new Promise((resolve) => {
      markReady = resolve
    })
    const onLine = (line) => {
      const parsed = parseFakesLine(line)
      if (parsed) markReady(parsed)
      return parsed !== null
    }
    const fakes = children.start('fakes', tsx('scripts/fakes.ts'), { cwd: root, env: childEnv, onLine })
    said = await Promise.race([ready, fakes.end, aborted()])
    signal.throwIfAborted()
    if (typeof said === 'string')
      throw new Error(`The stand-ins for mail and SMS ${said}. The end of their log:\n${fakes.logTail()}`)
    return 'listening'
  })
  return fakesEnv(env, said)
}

async function startDemo({ step, note, children, childEnv }) {
  if (!existsSync(join(root, 'scripts', 'demo.ts'))) {
    note('There is no demo yet (scripts/demo.ts is missing).')
    return []
  }
  const signIns = []
  await step('Demo', async () => {
    let markReady
    const ready = new Promise((resolve) => {
      markReady = resolve
    })
    const onLine = (line) => {
      const said = parseDemoLine(line)
      if (said.kind === 'signIn') signIns.push(said)
      if (said.kind === 'ready') markReady('running')
      if (said.kind === 'note') note(said.text)
      return said.kind !== 'log'
    }
    const demo = children.start('demo', tsx('scripts/demo.ts'), { cwd: root, env: childEnv, onLine })
    const late = delay(DEMO_PATIENCE_MS, 'still getting ready', { signal, ref: false })
    const how = await Promise.race([ready, demo.end, late, aborted()])
    signal.throwIfAborted()
    if (demo.ended !== null) throw new Error(`The demo ${how}. The end of its log:\n${demo.logTail()}`)
    demo.end.then((end) => signal.aborted || note(`The demo ${end}; Thinspan itself goes on.`))
    return how
  })
  return signIns
}

/** Programs in TypeScript; the condition makes `server-only` an empty module outside Next. */
function tsx(script) {
  return ['--conditions=react-server', '--import', 'tsx', script]
}

function aborted() {
  return new Promise((resolve) => signal.addEventListener('abort', () => resolve('stopped'), { once: true }))
}

class StopRequested extends Error {}

function listenForStop() {
  let asked = 0
  for (const name of ['SIGINT', 'SIGTERM', 'SIGHUP']) {
    process.on(name, () => {
      asked += 1
      if (asked === 1) say('\nStopping …\n')
      stopping.abort(new StopRequested())
    })
  }
  // npm killed outright cannot pass the signal on; without it nobody would be left to stop us.
  const launchers = env.npm_lifecycle_event === 'start' ? launchersOf(process.pid) : []
  setInterval(() => launchers.every(isAlive) || stopping.abort(new StopRequested()), 1_000).unref()
  // A terminal that is gone must not end the stopping half-way.
  process.stdout.on('error', () => {})
  process.stderr.on('error', () => {})
}

listenForStop()
let exitCode = 0
try {
  await main()
} catch (error) {
  const cause = signal.aborted ? signal.reason : error
  if (!(cause instanceof StopRequested)) {
    process.stderr.write(`\n${cause.message}\n`)
    exitCode = 1
  }
}
stopping.abort(new StopRequested())
for (const work of undo.reverse()) {
  await work().catch((error) => {
    process.stderr.write(`${error.message}\n`)
    exitCode = 1
  })
}
if (signal.reason instanceof StopRequested && exitCode === 0) say('Stopped.\n')
process.exit(exitCode)
