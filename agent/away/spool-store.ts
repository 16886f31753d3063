import { mkdir, readFile, rename, rm, stat, writeFile } from 'node:fs/promises'
import { dirname } from 'node:path'
import { AWAY_MOST_BYTES } from './away-log'

/** Where a spool outlives its program. */
export interface SpoolStore {
  /** Null where nothing is kept. */
  read(): Promise<string | null>
  /** Whole or not at all. @throws Error where it cannot be written */
  write(text: string): Promise<void>
  remove(): Promise<void>
}

/** In one file, for the owner alone. */
export function createSpoolFile(path: string): SpoolStore {
  return {
    async read() {
      try {
        const { size } = await stat(path)
        return size > 2 * AWAY_MOST_BYTES ? null : await readFile(path, 'utf8')
      } catch (error) {
        if (error instanceof Error && 'code' in error && error.code === 'ENOENT') return null
        throw error
      }
    },
    async write(text) {
      const draft = `${path}.part`
      await mkdir(dirname(path), { recursive: true })
      try {
        await writeFile(draft, text, { mode: 0o600 })
        await rename(draft, path)
      } catch (error) {
        // Half a draft would only take the room that is missing.
        await rm(draft, { force: true }).catch(() => undefined)
        throw error
      }
    },
    remove: () => rm(path, { force: true }),
  }
}
