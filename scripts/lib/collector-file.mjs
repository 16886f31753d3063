/** The collector as one file, which stores a fifth more reports than its sources run as they are: their loader names each function as it is made. */
import { createHash, randomUUID } from 'node:crypto'
import { mkdirSync, renameSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { build, stop } from 'esbuild'

export const COLLECTOR_FOLDER = '.collector'

/** Named by what is in it, so that the processes of one that runs are alike, whatever is built meanwhile. @returns its path */
export async function ensureCollectorFile(root) {
  const { outputFiles } = await build({
    absWorkingDir: root,
    entryPoints: [join(root, 'scripts', 'collector', 'main.ts')],
    bundle: true,
    platform: 'node',
    target: 'node20',
    format: 'esm',
    packages: 'external',
    // Web bundlers keep what is marked so out of pages; here it has nothing to say.
    alias: { 'server-only': join(root, 'node_modules', 'server-only', 'empty.js') },
    logLevel: 'silent',
    write: false,
  })
  // Or a process of its own would wait for more to build for as long as the collector runs.
  await stop()
  const [{ contents }] = outputFiles
  const folder = join(root, COLLECTOR_FOLDER)
  const file = join(folder, `${createHash('sha256').update(contents).digest('hex').slice(0, 16)}.mjs`)
  // A machine that went down at the wrong moment may have left a part of it.
  if (statSync(file, { throwIfNoEntry: false })?.size === contents.length) return file
  const unfinished = `${file}.${randomUUID()}`
  try {
    mkdirSync(folder, { recursive: true })
    writeFileSync(unfinished, contents)
    renameSync(unfinished, file)
  } catch (error) {
    rmSync(unfinished, { force: true })
    throw new Error(
      `The collector's program could not be written to ${folder} (${error.code}): let whoever runs it write there, or run it once as someone who may.`,
    )
  }
  return file
}
