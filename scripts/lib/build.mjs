/** A production build that is made anew only when what it is made from has changed. */
import { createHash } from 'node:crypto'
import { existsSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join, relative } from 'node:path'
import { runAlone } from './alone.mjs'
import { withLock } from './lock.mjs'

/** Folders a build reads, and the sort of file at the top that configures it. */
export const SOURCE_FOLDERS = ['app', 'components', 'entities', 'fonts', 'lib', 'migrations', 'public']
const TOP_FILE = /\.(ts|tsx|mjs)$|^(package-lock\.json|tsconfig\.json)$/
/** At the top, but no part of a build; next-env.d.ts is written by it. */
const NOT_BUILT = new Set(['vitest.config.ts', 'next-env.d.ts'])
const STAMP = 'thinspan-sources'
const LOCK_PATIENCE_MS = 600_000

/** The files below some folders, as paths under `root`; a folder that is not there has none. */
export function filesUnder(root, folders) {
  const files = []
  const walk = (folder) => {
    for (const entry of readdirSync(folder, { withFileTypes: true })) {
      const path = join(folder, entry.name)
      if (entry.isDirectory()) walk(path)
      else if (entry.isFile()) files.push(relative(root, path))
    }
  }
  for (const name of folders) {
    if (existsSync(join(root, name))) walk(join(root, name))
  }
  return files
}

/** The files a build is made from, as paths under `root`, sorted. */
export function sourceFiles(root) {
  const files = filesUnder(root, SOURCE_FOLDERS)
  for (const entry of readdirSync(root, { withFileTypes: true })) {
    if (entry.isFile() && TOP_FILE.test(entry.name) && !NOT_BUILT.has(entry.name)) files.push(entry.name)
  }
  return files.sort()
}

/** Names and contents, each with its length before it, so that no two trees run into each other. */
export function hashSources(files, read) {
  const hash = createHash('sha256')
  for (const file of files) {
    const content = read(file)
    hash.update(`${Buffer.byteLength(file)}:${file}${content.length}:`).update(content)
  }
  return hash.digest('hex')
}

/** Why a build is needed, or null. */
export function reasonToBuild({ hasBuild, stamp, hash }) {
  if (!hasBuild) return 'there was none'
  if (stamp === null) return 'the last one did not finish'
  return stamp === hash ? null : 'the sources changed'
}

export function ensureBuilt(root, { distFolder, signal, onStart = () => {} }) {
  const dist = join(root, distFolder)
  return withLock(dist, () => buildWhenStale({ root, dist, distFolder, signal, onStart }), {
    patienceMs: LOCK_PATIENCE_MS,
    signal,
  })
}

async function buildWhenStale({ root, dist, distFolder, signal, onStart }) {
  const stampFile = join(dist, STAMP)
  const hash = hashSources(sourceFiles(root), (file) => readFileSync(join(root, file)))
  const reason = reasonToBuild({
    hasBuild: existsSync(join(dist, 'BUILD_ID')),
    stamp: existsSync(stampFile) ? readFileSync(stampFile, 'utf8') : null,
    hash,
  })
  if (reason === null) return null
  onStart()
  rmSync(stampFile, { force: true })
  const env = {
    ...process.env,
    NODE_ENV: 'production',
    NEXT_TELEMETRY_DISABLED: '1',
    THINSPAN_DIST_DIR: distFolder,
  }
  // In the one folder that a build does not empty first.
  const claimFile = join(dist, 'cache', 'thinspan-build.json')
  try {
    await runAlone(claimFile, process.execPath, [nextProgram(root), 'build'], { cwd: root, env, signal })
  } catch (error) {
    if (error.killedBy !== 'SIGKILL' && error.exitCode !== 137) throw error
    throw new Error('The build was killed, most likely for lack of memory: free about 1.5 GB and try again.')
  }
  writeFileSync(stampFile, hash)
  return `built, as ${reason}`
}

export function nextProgram(root) {
  return join(root, 'node_modules', 'next', 'dist', 'bin', 'next')
}
