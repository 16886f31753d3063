/** Which process is which: a pid alone is reused, pid + start time + boot is not. Linux only (/proc). */
import { readdirSync, readFileSync } from 'node:fs'
import { setTimeout as delay } from 'node:timers/promises'

/** Field 22 of /proc/PID/stat, proc(5). The command name in field 2 may itself hold spaces and brackets. */
export function parseStartTicks(stat) {
  const afterName = stat.slice(stat.lastIndexOf(')') + 2).split(' ')
  const ticks = Number(afterName[19])
  return Number.isSafeInteger(ticks) && afterName[0] !== 'Z' ? ticks : null
}

/** Null when there is no such process, or only its zombie. */
export function identify(pid) {
  try {
    const startTicks = parseStartTicks(readFileSync(`/proc/${pid}/stat`, 'utf8'))
    if (startTicks === null) return null
    return { pid, startTicks, boot: readFileSync('/proc/sys/kernel/random/boot_id', 'utf8').trim() }
  } catch {
    return null
  }
}

export function isAlive(identity) {
  const now = identify(identity?.pid)
  return now !== null && now.startTicks === identity.startTicks && now.boot === identity.boot
}

/** npm, and the shell between it and us where there is one. */
export function launchersOf(pid) {
  const found = []
  for (let at = parentOf(pid); at !== null && found.length < 2; at = parentOf(at)) {
    found.push(identify(at))
    if (!/^(ba|da)?sh$/.test(readFileSync(`/proc/${at}/comm`, 'utf8').trim())) break
  }
  return found
}

/** @returns pids of the processes that this one has started and that still run */
export function childrenOf(pid) {
  return readdirSync('/proc')
    .filter((name) => /^\d+$/.test(name))
    .map(Number)
    .filter((child) => isChildOf(child, pid))
}

function isChildOf(child, pid) {
  try {
    return identify(child) !== null && parentOf(child) === pid
  } catch (error) {
    // It has ended meanwhile.
    if (error.code === 'ENOENT' || error.code === 'ESRCH') return false
    throw error
  }
}

function parentOf(pid) {
  const parent = /^PPid:\s+(\d+)/m.exec(readFileSync(`/proc/${pid}/status`, 'utf8'))?.[1]
  return parent === undefined || parent === '0' ? null : Number(parent)
}

export async function waitForEnd(identity, timeoutMs, signal) {
  const deadlineMs = performance.now() + timeoutMs
  while (isAlive(identity)) {
    if (performance.now() > deadlineMs) return false
    await delay(25, undefined, { signal })
  }
  return true
}

/** Signals in turn, each with its patience; `group` also reaches what the process started itself. */
export async function endProcess(identity, { signals, group = false }) {
  for (const { name, patienceMs } of signals) {
    if (!isAlive(identity)) return
    try {
      process.kill(group ? -identity.pid : identity.pid, name)
    } catch (error) {
      if (error.code !== 'ESRCH') throw error
    }
    if (await waitForEnd(identity, patienceMs)) return
  }
  if (isAlive(identity))
    throw new Error(`Process ${identity.pid} does not end: stop it by hand, then try again.`)
}
