/** A command that must not run twice at once in one place, even after its starter was killed and it lived on. */
import { mkdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { dirname } from 'node:path'
import { run } from './commands.mjs'
import { endProcess, identify } from './processes.mjs'
import { isIdentity } from './run-file.mjs'

const END_SIGNALS = [
  { name: 'SIGTERM', patienceMs: 5_000 },
  { name: 'SIGKILL', patienceMs: 5_000 },
]

/** The caller holds a lock, so whoever is noted in `claimFile` and alive has lost its starter: it is ended first. */
export async function runAlone(claimFile, command, args, options) {
  const left = readClaim(claimFile)
  if (left !== null) await endProcess(left, { signals: END_SIGNALS, group: true })
  mkdirSync(dirname(claimFile), { recursive: true })
  const onSpawn = (pid) => writeFileSync(claimFile, JSON.stringify(identify(pid)))
  try {
    return await run(command, args, { ...options, onSpawn })
  } finally {
    rmSync(claimFile, { force: true })
  }
}

function readClaim(path) {
  try {
    const claim = JSON.parse(readFileSync(path, 'utf8'))
    return isIdentity(claim) ? claim : null
  } catch {
    return null
  }
}
