import { spawn } from 'node:child_process'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import { WebSocket } from 'ws'
import { figuresOf } from './process-figures'

const TICK_MS = 200
const FRAME_BYTES = 125

export interface Bare {
  /** Of one core. */
  cpuShare: number
  wakesPerSecond: number
}

/**
 * The floor of this machine: a process that does nothing but send and hear as many messages of the size of frames over bare
 * WebSockets, and is woken as often. What an agent takes beyond it is the agent's own.
 */
export async function bareFloor(links: number, warmUpMs: number, ms: number): Promise<Bare> {
  const child = spawn(process.execPath, [join(import.meta.dirname, 'bare-end.mjs')], {
    stdio: ['pipe', 'pipe', 'inherit'],
  })
  const port = await new Promise<string>((resolve) =>
    createInterface({ input: child.stdout }).once('line', resolve),
  )
  const frame = Buffer.alloc(FRAME_BYTES)
  const timers = new Set<NodeJS.Timeout>()
  const later = (ms: number, run: () => void) => {
    const timer = setTimeout(() => {
      timers.delete(timer)
      run()
    }, ms)
    timers.add(timer)
  }
  const sockets = Array.from({ length: links }, (_, index) => {
    const socket = new WebSocket(`ws://127.0.0.1:${port}`, { perMessageDeflate: false })
    socket.on('error', () => {})
    // Each in a phase of its own, as neighbours tick. Intervals would fall into one after the first delay, and stay so.
    let dueAtMs = performance.now() + (TICK_MS * index) / links
    const send = () => {
      socket.send(frame)
      dueAtMs += TICK_MS
      later(Math.max(0, dueAtMs - performance.now()), send)
    }
    socket.on('open', () => later(Math.max(0, dueAtMs - performance.now()), send))
    return socket
  })
  try {
    await delay(warmUpMs)
    const before = figuresOf(child.pid ?? 0)
    const startedAtMs = performance.now()
    await delay(ms)
    const after = figuresOf(child.pid ?? 0)
    const seconds = (performance.now() - startedAtMs) / 1000
    return {
      cpuShare: (after.cpuSeconds - before.cpuSeconds) / seconds,
      wakesPerSecond: (after.wakes - before.wakes) / seconds,
    }
  } finally {
    for (const timer of timers) clearTimeout(timer)
    for (const socket of sockets) socket.terminate()
    child.kill()
  }
}

const delay = (ms: number): Promise<void> => new Promise((resolve) => setTimeout(resolve, ms))
