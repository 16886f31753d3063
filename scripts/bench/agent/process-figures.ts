import { readdirSync, readFileSync } from 'node:fs'

/** What the kernel says of one process; Linux, proc(5). */
export interface ProcessFigures {
  /** Time spent on a processor by all its threads. */
  cpuSeconds: number
  rssMib: number
  /** The most that was ever resident. */
  peakRssMib: number
}

export function figuresOf(pid: number): ProcessFigures {
  const status = readFileSync(`/proc/${pid}/status`, 'utf8')
  return {
    cpuSeconds: cpuSecondsOf(pid),
    rssMib: kibOf(status, 'VmRSS') / 1024,
    peakRssMib: kibOf(status, 'VmHWM') / 1024,
  }
}

/** Nanoseconds on a processor, by thread: exact, where utime and stime are sampled a hundred times a second. */
function cpuSecondsOf(pid: number): number {
  let nanoseconds = 0
  for (const thread of readdirSync(`/proc/${pid}/task`))
    nanoseconds += Number(readFileSync(`/proc/${pid}/task/${thread}/schedstat`, 'utf8').split(' ')[0])
  return nanoseconds / 1e9
}

function kibOf(status: string, key: string): number {
  const kib = Number(new RegExp(`^${key}:\\s+(\\d+) kB$`, 'm').exec(status)?.[1])
  if (!Number.isFinite(kib)) throw new Error(`/proc says nothing of ${key}.`)
  return kib
}
