import { readdirSync, readFileSync } from 'node:fs'

/** Linux counts processor time in hundredths of a second. */
const TICK_MS = 10

/** Processor time that a process and all below it have taken, milliseconds; null where the system does not tell. */
export function cpuBelowMs(pid: number): number | null {
  try {
    const all = readdirSync('/proc')
      .filter((name) => /^\d+$/.test(name))
      .flatMap((name) => statOf(Number(name)))
    const members = new Set([pid])
    // Parents have come before their children, but numbers begin anew.
    for (let grown = true; grown; ) {
      const before = members.size
      for (const { pid, parent } of all) if (members.has(parent)) members.add(pid)
      grown = members.size > before
    }
    return all.filter(({ pid }) => members.has(pid)).reduce((sum, { ticks }) => sum + ticks, 0) * TICK_MS
  } catch {
    return null
  }
}

function statOf(pid: number): { pid: number; parent: number; ticks: number }[] {
  try {
    // proc(5): after the name in brackets come state, parent, …, utime and stime.
    const fields = readFileSync(`/proc/${pid}/stat`, 'utf8')
      .replace(/^.*\) /s, '')
      .split(' ')
    return [{ pid, parent: Number(fields[1]), ticks: Number(fields[11]) + Number(fields[12]) }]
  } catch {
    return []
  }
}
