import { readFileSync } from 'node:fs'

/** What a build takes at its peak; measured 1.4 GB. */
export const BUILD_BYTES = 1.5e9

/** MemAvailable and SwapFree of /proc/meminfo, in bytes; null where the file does not say. */
export function parseMeminfo(text) {
  const bytesOf = (name) => {
    const match = new RegExp(`^${name}:\\s+(\\d+) kB`, 'm').exec(text)
    return match === null ? null : Number(match[1]) * 1024
  }
  const available = bytesOf('MemAvailable')
  return available === null ? null : available + (bytesOf('SwapFree') ?? 0)
}

/** A container's own limit (cgroup v2) counts too; "max" is none. Cached files inside it can be given back. */
export function roomInGroup({ max, current, stat }) {
  const limit = Number(max)
  if (!Number.isFinite(limit)) return Number.POSITIVE_INFINITY
  const cached = Number(/^inactive_file (\d+)/m.exec(stat)?.[1] ?? 0)
  return Math.max(0, limit - Number(current) + cached)
}

export function memorySentence(freeBytes, neededBytes = BUILD_BYTES) {
  if (freeBytes === null || freeBytes >= neededBytes) return null
  const gb = (bytes) => (bytes / 1e9).toFixed(1)
  return `Only ${gb(freeBytes)} GB of memory is free and a build takes about ${gb(neededBytes)} GB: if it is killed, close something and try again.`
}

export function freeMemoryBytes() {
  const read = (path) => {
    try {
      return readFileSync(path, 'utf8')
    } catch {
      return null
    }
  }
  const machine = parseMeminfo(read('/proc/meminfo') ?? '')
  const max = read('/sys/fs/cgroup/memory.max')
  if (max === null) return machine
  const group = roomInGroup({
    max: max.trim(),
    current: read('/sys/fs/cgroup/memory.current') ?? '0',
    stat: read('/sys/fs/cgroup/memory.stat') ?? '',
  })
  return machine === null ? null : Math.min(machine, group)
}
