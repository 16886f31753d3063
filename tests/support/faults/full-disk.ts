import { spawnSync } from 'node:child_process'
import { mkdtempSync, rmdirSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'

const CHUNK = Buffer.alloc(4_096)

/** A small file system of its own in memory, which can be filled to the last byte; gone with `remove` and with the process. */
export class FullDisk {
  readonly folder = mkdtempSync(join(tmpdir(), 'thinspan-disk-'))
  /** Why there is none, in one line; null where there is. */
  readonly why: string | null
  readonly #removeAtExit = () => this.remove()

  constructor() {
    const options = ['-t', 'tmpfs', '-o', 'size=64k', 'tmpfs', this.folder]
    const { status, stderr } = spawnSync('mount', options, { encoding: 'utf8' })
    this.why = status === 0 ? null : `a file system of its own cannot be mounted: ${(stderr ?? '').trim()}`
    process.once('exit', this.#removeAtExit)
  }

  fill(): void {
    for (;;) {
      try {
        writeFileSync(join(this.folder, 'ballast'), CHUNK, { flag: 'a' })
      } catch (error) {
        if (error instanceof Error && 'code' in error && error.code === 'ENOSPC') return
        throw error
      }
    }
  }

  remove(): void {
    process.off('exit', this.#removeAtExit)
    if (this.why === null) spawnSync('umount', [this.folder])
    rmdirSync(this.folder)
  }
}
