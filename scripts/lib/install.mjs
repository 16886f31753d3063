/** node_modules as package-lock.json wants it, told from what is there and not from a stamp. */
import { existsSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { runAlone } from './alone.mjs'
import { withLock } from './lock.mjs'

const LOCK_PATIENCE_MS = 600_000

/**
 * Why an installation is needed, or null. `lock` is package-lock.json, `installed` is what npm noted inside
 * node_modules (null if it never finished), `isThere` tells of a package's folder.
 */
export function reasonToInstall({ lock, installed, isThere }) {
  if (installed === null) return 'node_modules is missing or unfinished'
  for (const [path, wanted] of Object.entries(lock.packages ?? {})) {
    if (path === '' || wanted.link) continue
    const have = installed.packages?.[path]
    // Optional packages are often for another processor or system and then rightly left out.
    if (have === undefined && !wanted.optional && !wanted.devOptional) return `${path} is missing`
    if (have === undefined) continue
    if (have.version !== wanted.version || have.integrity !== wanted.integrity) {
      return `${path} is ${have.version} and ${wanted.version} is wanted`
    }
    if (!isThere(path)) return `${path} is gone`
  }
  return null
}

export function ensureInstalled(root, { signal }) {
  return withLock(join(root, 'node_modules'), () => installWhenStale(root, signal), {
    patienceMs: LOCK_PATIENCE_MS,
    signal,
  })
}

async function installWhenStale(root, signal) {
  const readJson = (path) => (existsSync(path) ? JSON.parse(readFileSync(path, 'utf8')) : null)
  const lock = readJson(join(root, 'package-lock.json'))
  if (lock === null) throw new Error('package-lock.json is missing: check the repository out anew.')
  const reason = reasonToInstall({
    lock,
    installed: readJson(join(root, 'node_modules', '.package-lock.json')),
    isThere: (path) => existsSync(join(root, path, 'package.json')),
  })
  if (reason === null) return null
  const args = ['ci', '--include=dev', '--no-audit', '--no-fund']
  await runAlone(join(root, '.thinspan-install.json'), 'npm', args, { cwd: root, signal })
  return `installed from package-lock.json, as ${reason}`
}
