import { watch } from 'node:fs'
import { readFile } from 'node:fs/promises'
import { basename, dirname } from 'node:path'
import type { Clock } from '../clock'
import { parseItems } from './items'
import type { PathStep } from './path-expression'
import type { ReadList } from './source'

/** Programs write a file in several goes; it is looked at once it has been quiet for this long. */
export const QUIET_MS = 150

export function fileReader({ path, steps }: { path: string; steps: readonly PathStep[] | null }): ReadList {
  return async (signal) => {
    try {
      return parseItems(await readFile(path, { encoding: 'utf8', signal }), steps)
    } catch (error) {
      return { ok: false, reason: error instanceof Error ? error.message : String(error) }
    }
  }
}

/** The folder is watched, not the file: editors put a new file in place of the old one. */
export function watchFile({ clock }: { clock: Clock }, path: string, changed: () => void): () => void {
  let cancel = () => {}
  try {
    const watcher = watch(dirname(path), { persistent: false }, (_, name) => {
      if (name !== null && name !== basename(path)) return
      cancel()
      cancel = clock.after(QUIET_MS, changed)
    })
    // Where the folder goes away, the looks at intervals remain.
    watcher.on('error', () => watcher.close())
    return () => {
      cancel()
      watcher.close()
    }
  } catch {
    return () => {}
  }
}
