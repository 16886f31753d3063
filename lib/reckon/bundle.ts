import { readFile } from 'node:fs/promises'
import { join } from 'node:path'
import { build } from 'esbuild'

/**
 * The thread's program as one text. Neither the web server's bundle nor a source file can be handed to a thread: the bundler
 * keeps the one to itself, and loaders of TypeScript do not reach into threads on Node 20. So it is made where it is needed, once per process.
 */
export async function bundleWorker(root: string): Promise<string> {
  const entry = join(root, 'lib', 'reckon', 'worker.ts')
  // Said in words of its own where the sources are not there.
  await readFile(/* turbopackIgnore: true */ entry)
  const { outputFiles } = await build({
    absWorkingDir: root,
    entryPoints: [entry],
    bundle: true,
    platform: 'node',
    target: 'node20',
    format: 'cjs',
    write: false,
  })
  const [file] = outputFiles
  if (!file) throw new Error('The thread for exact figures could not be built.')
  return file.text
}
