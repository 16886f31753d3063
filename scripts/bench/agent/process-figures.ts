import { readdirSync, readFileSync } from 'node:fs'
import { childrenOf } from '../../lib/processes.mjs'

/** What the kernel says of one process; Linux, proc(5). */
export interface ProcessFigures {
  /** Time spent on a processor by all its threads. */
  cpuSeconds: number
  /** Time the main thread was ready to run and none was free. */
  waitedSeconds: number
  /** How often the main thread has gone to sleep of its own will, and so was woken. */
  wakes: number
  rssMib: number
  /** The most that was ever resident. */
  peakRssMib: number
}

export function figuresOf(pid: number): ProcessFigures {
  const status = readFileSync(`/proc/${pid}/status`, 'utf8')
  return {
    cpuSeconds: cpuSecondsOf(pid),
    waitedSeconds: schedstatOf(pid, pid)[1] / 1e9,
    wakes: wakesOf(pid),
    rssMib: kibOf(status, 'VmRSS') / 1024,
    peakRssMib: kibOf(status, 'VmHWM') / 1024,
  }
}

/**
 * Of a process and all that it has started and that still runs, together. Memory that they share counts once: proportional set
 * sizes, proc(5).
 */
export function figuresWithChildrenOf(pid: number): Pick<ProcessFigures, 'cpuSeconds' | 'rssMib'> {
  const all = [pid, ...childrenOf(pid)]
  const sumOf = (read: (each: number) => number) =>
    all.reduce((sum, each) => sum + (unlessEnded(() => read(each)) ?? 0), 0)
  const pssMibOf = (each: number) => kibOf(readFileSync(`/proc/${each}/smaps_rollup`, 'utf8'), 'Pss') / 1024
  return { cpuSeconds: sumOf(cpuSecondsOf), rssMib: sumOf(pssMibOf) }
}

/** @returns null where the process or thread has ended meanwhile */
export function unlessEnded<T>(read: () => T): T | null {
  try {
    return read()
  } catch (error) {
    if (error instanceof Error && 'code' in error && (error.code === 'ENOENT' || error.code === 'ESRCH'))
      return null
    throw error
  }
}

function cpuSecondsOf(pid: number): number {
  let nanoseconds = 0
  for (const thread of readdirSync(`/proc/${pid}/task`))
    nanoseconds += unlessEnded(() => schedstatOf(pid, thread)[0]) ?? 0
  return nanoseconds / 1e9
}

/**
 * Nanoseconds on a processor and waiting for one, by thread: exact, where utime and stime are sampled a hundred times a second
 * (the kernel's scheduler/sched-stats.rst).
 */
function schedstatOf(pid: number, thread: number | string): [number, number] {
  const [ran, waited] = readFileSync(`/proc/${pid}/task/${thread}/schedstat`, 'utf8').split(' ')
  return [Number(ran), Number(waited)]
}

function wakesOf(pid: number): number {
  const status = readFileSync(`/proc/${pid}/task/${pid}/status`, 'utf8')
  const wakes = Number(/^voluntary_ctxt_switches:\s+(\d+)$/m.exec(status)?.[1])
  if (!Number.isFinite(wakes)) throw new Error('/proc says nothing of context switches.')
  return wakes
}

function kibOf(status: string, key: string): number {
  const kib = Number(new RegExp(`^${key}:\\s+(\\d+) kB$`, 'm').exec(status)?.[1])
  if (!Number.isFinite(kib)) throw new Error(`/proc says nothing of ${key}.`)
  return kib
}
