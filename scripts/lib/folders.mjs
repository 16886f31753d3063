import { chmodSync, mkdirSync } from 'node:fs'

/** Makes the folder with exactly `mode`, whatever the umask; one that is already there stays as it is. */
export function makeFolder(path, mode) {
  if (mkdirSync(path, { recursive: true }) !== undefined) chmodSync(path, mode)
  return path
}

/** Others (the database's own user) may pass through, not look around. */
export const PASS_THROUGH = 0o711
export const PRIVATE = 0o700
