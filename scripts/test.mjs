#!/usr/bin/env node
/**
 * `npm test`: everything the tests need on this machine, the checks, the tests. Composition root.
 * `npm test -- FILE …` runs vitest with those arguments and leaves the other checks out.
 */
import { existsSync, readFileSync, rmSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { ensureAgentFile } from './lib/agent-file.mjs'
import { ensurePackages } from './lib/apt.mjs'
import { ensureBuilt } from './lib/build.mjs'
import { findChromium } from './lib/chromium.mjs'
import { run } from './lib/commands.mjs'
import { ensureInstalled } from './lib/install.mjs'
import { findIproute } from './lib/iproute.mjs'
import { freeMemoryBytes, memorySentence } from './lib/memory.mjs'
import { requireNode } from './lib/node-version.mjs'
import { ensurePostgres } from './lib/postgres.mjs'
import { createSteps } from './lib/steps.mjs'
import { openTestCluster, TEST_DIST_FOLDER, testFolder } from './lib/test-cluster.mjs'
import { countResults, verdict } from './lib/vitest-report.mjs'

const root = resolve(import.meta.dirname, '..')
const env = process.env
const say = (text) => process.stdout.write(text)
const stopping = new AbortController()
const { signal } = stopping
const failedSteps = []
let closeCluster = async () => {}

async function main() {
  requireNode(process.versions.node)
  const args = process.argv.slice(2)
  const whole = args.length === 0
  const { step, note, total } = createSteps({ write: say, nowMs: () => performance.now() })
  const check = (name, work) => step(name, work).catch((error) => giveUpUnless(error, name))

  await step('Packages', () => ensureInstalled(root, { signal }))
  if (whole) await step('Chromium', ensureChromium)
  if (whole) await step('Network namespaces', () => ensureIproute(note))
  if (!env.TEST_DATABASE_URL) await step('PostgreSQL', () => ensureDatabaseServer(note))
  if (whole) {
    await step('Build', () => build(note))
    await step('Agent file', () => ensureAgentFile(root))
    await check('Types', async () => {
      await run(process.execPath, [bin('typescript/bin/tsc'), '-p', 'tsconfig.next.json'], {
        cwd: root,
        signal,
      })
      return 'right'
    })
    await check('Lint and format', async () => {
      const options = ['check', '--max-diagnostics=40', '--colors=off']
      await run(process.execPath, [bin('@biomejs/biome/bin/biome'), ...options], { cwd: root, signal })
      return 'clean'
    })
  }
  const result = verdict({ ...(await runVitest(args)), failedSteps })
  if (failedSteps.length > 0) say(`Failed before the tests: ${failedSteps.join(', ')} (see above).\n`)
  say(`Took ${total()}.\n`)
  return result
}

/** A failed check is told and counted, and the tests run all the same. */
function giveUpUnless(error, name) {
  signal.throwIfAborted()
  failedSteps.push(name)
  say(`${error.message}\n`)
}

async function ensureChromium() {
  if (findChromium(env) !== null) return null
  await ensurePackages(['chromium'], { instead: 'set CHROMIUM_PATH to a Chromium you have', signal })
  return "installed from Debian's packages"
}

/** Without it the tests in network namespaces are left out, and say so. */
async function ensureIproute(note) {
  if (process.platform !== 'linux' || process.getuid() !== 0 || findIproute() !== null) return null
  try {
    await ensurePackages(['iproute2'], { instead: 'leave the tests in network namespaces out', signal })
    return "iproute2 installed from Debian's packages"
  } catch (error) {
    signal.throwIfAborted()
    note(error.message)
    return null
  }
}

async function ensureDatabaseServer(note) {
  try {
    await ensurePostgres({ instead: 'set TEST_DATABASE_URL to a server for tests', signal })
  } catch (error) {
    signal.throwIfAborted()
    note(error.message)
    return 'none here: the tests try a container'
  }
  const cluster = await openTestCluster(root)
  closeCluster = cluster.close
  env.TEST_DATABASE_URL = cluster.url
  if (cluster.closed !== null)
    note(`User "postgres" may not pass through ${cluster.closed}: the cluster is elsewhere.`)
  return `${cluster.how}, port ${cluster.port}`
}

function build(note) {
  const sentence = memorySentence(freeMemoryBytes())
  const options = { distFolder: TEST_DIST_FOLDER, signal, onStart: () => sentence && note(sentence) }
  return ensureBuilt(root, options)
}

async function runVitest(args) {
  const reportFile = join(testFolder(root), `report-${process.pid}.json`)
  const reporters = ['--reporter=default', '--reporter=json', `--outputFile.json=${reportFile}`]
  try {
    const command = [bin('vitest/vitest.mjs'), 'run', ...reporters, ...args]
    await run(process.execPath, command, { cwd: root, signal, show: true })
    return { exitCode: 0, counts: readCounts(reportFile) }
  } catch (error) {
    signal.throwIfAborted()
    if (error.exitCode === undefined) throw error
    return { exitCode: error.exitCode ?? 1, counts: readCounts(reportFile) }
  } finally {
    rmSync(reportFile, { force: true })
  }
}

function readCounts(reportFile) {
  return existsSync(reportFile)
    ? countResults(JSON.parse(readFileSync(reportFile, 'utf8')))
    : { passed: 0, failed: 0 }
}

function bin(path) {
  return join(root, 'node_modules', path)
}

for (const name of ['SIGINT', 'SIGTERM', 'SIGHUP'])
  process.on(name, () => stopping.abort(new Error(`Stopped by ${name}.`)))
let result
try {
  result = await main()
} catch (error) {
  process.stderr.write(`${signal.aborted ? signal.reason.message : error.message}\n`)
  result = { line: `0 passed, ${failedSteps.length + 1} failed`, exitCode: 1 }
}
await closeCluster().catch((error) => {
  process.stderr.write(`${error.message}\n`)
  result.exitCode = 1
})
say(`${result.line}\n`)
process.exitCode = result.exitCode
