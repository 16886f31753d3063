/** What a start has running, noted so that the next one can clean up after one that was killed. */
import { readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { endProcess, isAlive, waitForEnd } from './processes.mjs'

/** The note, or null for text that is not one of ours. */
export function parseRunFile(text) {
  try {
    const { owner, address, children } = JSON.parse(text)
    if (!isIdentity(owner) || !Array.isArray(children)) return null
    return {
      owner,
      address: typeof address === 'string' ? address : null,
      children: children.filter((child) => typeof child?.name === 'string' && isIdentity(child)),
    }
  } catch {
    return null
  }
}

export function isIdentity(value) {
  return (
    Number.isInteger(value?.pid) && Number.isInteger(value?.startTicks) && typeof value?.boot === 'string'
  )
}

/** Refuses beside a living start; else the children of a dead one that are provably still the same processes. */
export function planRecovery(note, alive) {
  if (note === null) return { action: 'nothing' }
  if (alive(note.owner)) return { action: 'refuse', pid: note.owner.pid, address: note.address }
  const left = note.children.filter(alive)
  return left.length === 0 ? { action: 'nothing' } : { action: 'end', children: left }
}

/** A start that was just told to stop may still be at it. */
const ENDING_PATIENCE_MS = 6_000

/** What a killed start left running; rejects beside one that lives and goes on living. */
export async function findLeftovers(path, { patienceMs = ENDING_PATIENCE_MS } = {}) {
  const note = readRunFile(path)
  if (note !== null) await waitForEnd(note.owner, patienceMs)
  const plan = planRecovery(readRunFile(path), isAlive)
  if (plan.action === 'refuse') {
    const where = plan.address === null ? '' : ` at ${plan.address}`
    throw new Error(
      `Thinspan already runs from this folder${where} (process ${plan.pid}): stop it with "kill ${plan.pid}", or give this one its own THINSPAN_DATA_DIR and PORT.`,
    )
  }
  return plan.action === 'end' ? plan.children : []
}

/** Resolves to a few words on what was ended. */
export async function endLeftovers(children) {
  for (const child of children) {
    await endProcess(child, {
      group: true,
      signals: [
        { name: 'SIGTERM', patienceMs: 5_000 },
        { name: 'SIGKILL', patienceMs: 5_000 },
      ],
    })
  }
  return `ended ${children.map((child) => `${child.name} (${child.pid})`).join(', ')}`
}

export function readRunFile(path) {
  try {
    return parseRunFile(readFileSync(path, 'utf8'))
  } catch (error) {
    if (error.code === 'ENOENT') return null
    throw error
  }
}

/** Renamed into place, so that a kill in the middle leaves the old note or the new one. */
export function writeRunFile(path, note) {
  const draft = `${path}.new`
  writeFileSync(draft, JSON.stringify(note), { mode: 0o600 })
  renameSync(draft, path)
}

export function clearRunFile(path) {
  rmSync(path, { force: true })
}
