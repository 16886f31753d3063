/** The collector as one file. Sources run as they are would cost a tenth more: their loader names each function as it is made. */
import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, renameSync, writeFileSync } from 'node:fs'
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
  if (existsSync(file)) return file
  mkdirSync(folder, { recursive: true })
  const unfinished = `${file}.${process.pid}`
  writeFileSync(unfinished, contents)
  renameSync(unfinished, file)
  return file
}
