import { randomUUID } from 'node:crypto'
import { chmod, link, mkdir, readFile, rename, rm, writeFile } from 'node:fs/promises'
import { dirname } from 'node:path'
import type { PassGrant } from '@/lib/protocol'
import {
  type AgentConfig,
  type ConfigDraft,
  type ConfigError,
  type ConfigResult,
  parseConfig,
} from './schema'

export async function readConfig(path: string): Promise<ConfigResult> {
  const file = await readText(path)
  return file.ok ? parseConfig(file.text) : file
}

async function readText(
  path: string,
): Promise<{ ok: true; text: string } | { ok: false; error: ConfigError }> {
  try {
    return { ok: true, text: await readFile(path, 'utf8') }
  } catch (error) {
    const missing = error instanceof Error && 'code' in error && error.code === 'ENOENT'
    return { ok: false, error: missing ? { code: 'missing' } : { code: 'unreadable', reason: String(error) } }
  }
}

/**
 * Puts some members into the configuration as it is by now: someone may have edited it since it was read, and what
 * this version does not know of stays as well. A member that is undefined is taken away.
 * @returns why it was left as it is, or null
 */
export async function changeConfig(
  path: string,
  agentId: string,
  change: Partial<AgentConfig>,
): Promise<string | null> {
  const file = await readText(path)
  const present = file.ok ? parseConfig(file.text) : file
  // Not the whole error: a draft's key is nothing for a log.
  if (!file.ok || !present.ok) return `the configuration is ${present.ok ? 'gone' : present.error.code}`
  if (present.config.agentId !== agentId) return `the configuration is ${present.config.agentId}'s by now`
  await writeConfig(path, { ...JSON.parse(file.text), ...change }, { replace: true })
  return null
}

export function renewPass(path: string, agentId: string, grant: PassGrant): Promise<string | null> {
  const { pass, passExpiresAt } = grant
  return changeConfig(path, agentId, { pass, passExpiresAt })
}

/** Takes a draft away, unless it has become a configuration. */
export async function dropDraft(path: string): Promise<void> {
  const present = await readConfig(path)
  if (!present.ok && present.error.code === 'unfinished') await rm(path, { force: true })
}

/** Out of the way, but not gone: its key is what the collector knew this agent by. @returns where it is now */
export async function putAside(path: string, word: string): Promise<string> {
  const aside = `${path}.${word}`
  await rename(path, aside)
  return aside
}

/** Writes whole or not at all, for the owner alone. @returns false where it is there already and may not be replaced */
export async function writeConfig(
  path: string,
  config: AgentConfig | ConfigDraft,
  init: { replace: boolean },
): Promise<boolean> {
  await mkdir(dirname(path), { recursive: true })
  const draft = `${path}.${randomUUID()}`
  await writeFile(draft, `${JSON.stringify(config, null, 2)}\n`, { mode: 0o600, flag: 'wx' })
  try {
    // The umask may only take away, but a mount may add.
    await chmod(draft, 0o600)
    if (init.replace) {
      await rename(draft, path)
      return true
    }
    // A link fails where the name is taken, which a rename would overwrite.
    await link(draft, path)
    return true
  } catch (error) {
    if (error instanceof Error && 'code' in error && error.code === 'EEXIST') return false
    throw error
  } finally {
    await rm(draft, { force: true })
  }
}
