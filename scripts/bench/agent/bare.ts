import { spawn } from 'node:child_process'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import { WebSocket } from 'ws'
import { figuresOf } from './process-figures'

const TICK_MS = 200
const FRAME_BYTES = 125

/**
 * The floor of this machine: a process that does nothing but send and hear as many messages of the size of frames over bare
 * WebSockets. What an agent takes beyond it is the agent's own. @returns share of a core
 */
export async function bareCpuShare(links: number, warmUpMs: number, ms: number): Promise<number> {
  const child = spawn(process.execPath, [join(import.meta.dirname, 'bare-end.mjs')], {
    stdio: ['pipe', 'pipe', 'inherit'],
  })
  const port = await new Promise<string>((resolve) =>
    createInterface({ input: child.stdout }).once('line', resolve),
  )
  const frame = Buffer.alloc(FRAME_BYTES)
  const timers: NodeJS.Timeout[] = []
  const sockets = Array.from({ length: links }, (_, index) => {
    const socket = new WebSocket(`ws://127.0.0.1:${port}`, { perMessageDeflate: false })
    socket.on('error', () => {})
    const begin = () => timers.push(setInterval(() => socket.send(frame), TICK_MS))
    // Neighbours tick each in its own phase.
    socket.on('open', () => timers.push(setTimeout(begin, (TICK_MS * index) / links)))
    return socket
  })
  try {
    await delay(warmUpMs)
    const before = figuresOf(child.pid ?? 0)
    const startedAtMs = performance.now()
    await delay(ms)
    const { cpuSeconds } = figuresOf(child.pid ?? 0)
    return (1000 * (cpuSeconds - before.cpuSeconds)) / (performance.now() - startedAtMs)
  } finally {
    for (const timer of timers) clearInterval(timer)
    for (const socket of sockets) socket.terminate()
    child.kill()
  }
}

const delay = (ms: number): Promise<void> => new Promise((resolve) => setTimeout(resolve, ms))
