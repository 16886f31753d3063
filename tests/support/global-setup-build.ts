/** The production build that the end-to-end tests start and the agent file it serves; made here only when stale. */
import { resolve } from 'node:path'
import { fileURLToPath } from 'node:url'
import { ensureAgentFile } from '@/scripts/lib/agent-file.mjs'
import { ensureBuilt } from '@/scripts/lib/build.mjs'
import { TEST_DIST_FOLDER } from '@/scripts/lib/test-cluster.mjs'

const root = resolve(fileURLToPath(import.meta.url), '../../..')

export async function setup(): Promise<void> {
  const { signal } = new AbortController()
  await ensureBuilt(root, { distFolder: TEST_DIST_FOLDER, signal })
  await ensureAgentFile(root)
}
