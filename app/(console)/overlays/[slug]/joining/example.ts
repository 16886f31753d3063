import 'server-only'
import { readFile } from 'node:fs/promises'
import { join } from 'node:path'
import type { JoiningExample } from '@/components/joining/types'
import { partMarked } from '@/lib/face/example-part'

const FOLDER = 'examples/embedding'

/** From the files that the tests run, so that page and program cannot drift apart. */
export async function readExample(): Promise<JoiningExample> {
  const part = async (name: string) => {
    const path = `${FOLDER}/${name}`
    return { path, text: partMarked(await readFile(join(process.cwd(), path), 'utf8')) }
  }
  return {
    folder: FOLDER,
    parts: [await part('frames-over.ts'), await part('measured-node.ts')],
    main: `${FOLDER}/main.ts`,
  }
}
