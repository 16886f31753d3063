import 'server-only'
import { createHash } from 'node:crypto'
import { readFile, stat } from 'node:fs/promises'
import { join } from 'node:path'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { addRelease, findRelease, type Release } from './releases'

/** The build's first comment says the version. */
const VERSION_LINE = /^#![^\n]*\n\/\* thinspan-agent (\S{1,40})\n/

interface Held {
  path: string
  modifiedAtMs: number
  file: Release
}
let held: Held | null = null

export const agentFilePath = (): string =>
  // Read when asked for: no part of the build.
  join(/* turbopackIgnore: true */ process.cwd(), '.agent', 'thinspan-agent.mjs')

/** The file that was built on this server; read again only when it was built again. Null where there is none. */
export async function readAgentFile(path: string): Promise<Release | null> {
  try {
    const { mtimeMs } = await stat(/* turbopackIgnore: true */ path)
    if (held?.path === path && held.modifiedAtMs === mtimeMs) return held.file
    const bytes = new Uint8Array(await readFile(/* turbopackIgnore: true */ path))
    const version = VERSION_LINE.exec(new TextDecoder().decode(bytes.subarray(0, 200)))?.[1]
    if (version === undefined) return null
    const file = { version, sha256: createHash('sha256').update(bytes).digest('hex'), bytes }
    held = { path, modifiedAtMs: mtimeMs, file }
    return file
  } catch (error) {
    if (error instanceof Error && 'code' in error && error.code === 'ENOENT') return null
    throw error
  }
}

/** Keeps the file of this server among the releases, so that it can be offered, and asked for when a later one is here. */
export async function registerAgentFile(em: EntityManager, path: string): Promise<Release | null> {
  const file = await readAgentFile(path)
  if (file) await addRelease(em, file)
  return file
}

/** `version` null for the one of this server. */
export async function getAgentFile(call: Call, version: string | null): Promise<Release> {
  authorise(call, 'agent-file.read')
  const current = await readAgentFile(agentFilePath())
  if (current && (version === null || version === current.version)) return current
  const kept = await findRelease(call.em, version)
  if (kept) return kept
  if (version !== null)
    throw new AppError('not-found', `There is no agent of version ${version} here. Leave the version out.`)
  throw new AppError('unavailable', 'The agent is not built yet. Run "npm run build:agent" on the server.')
}
