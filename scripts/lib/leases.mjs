/** Who still uses a cluster that several programs share: the last one to leave may stop it. */
import { mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { identify, isAlive } from './processes.mjs'
import { isIdentity } from './run-file.mjs'

export function takeLease(folder) {
  mkdirSync(folder, { recursive: true })
  const mine = identify(process.pid)
  const path = join(folder, `${mine.pid}.json`)
  writeFileSync(path, JSON.stringify(mine))
  return path
}

/** Gives the lease back and clears those of the dead; how many living users remain. */
export function returnLease(folder, lease) {
  rmSync(lease, { force: true })
  let living = 0
  for (const name of readdirSync(folder)) {
    const path = join(folder, name)
    if (holderLives(path)) living += 1
    else rmSync(path, { force: true })
  }
  return living
}

function holderLives(path) {
  try {
    const holder = JSON.parse(readFileSync(path, 'utf8'))
    return isIdentity(holder) && isAlive(holder)
  } catch {
    return false
  }
}
