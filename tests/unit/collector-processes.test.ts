import type { Worker } from 'node:cluster'
import { EventEmitter } from 'node:events'
import { describe, expect, it } from 'vitest'
import { IntakeProcesses, KILLED_AFTER_MS, REPLACED_AFTER_MS } from '@/scripts/collector/intake-processes'
import { processesWanted } from '@/scripts/collector/processes-wanted'
import { FakeClock } from '../support/fake-clock'

describe('how many processes take reports in', () => {
  it.each([
    [undefined, 1, 1],
    [undefined, 2, 2],
    ['', 16, 4],
    ['1', 16, 1],
    ['12', 2, 12],
  ])('asked for %s on %i processors: %i', (asked, cores, wanted) => {
    expect(processesWanted({ INGEST_PROCESSES: asked }, cores)).toBe(wanted)
  })

  it.each(['0', '-1', '1.5', 'two', '100'])('%s is refused', (asked) => {
    expect(() => processesWanted({ INGEST_PROCESSES: asked }, 2)).toThrow(
      `Set INGEST_PROCESSES to how many processes take reports in, 1 to 99; "${asked}" is no such number.`,
    )
  })
})

class FakeWorker extends EventEmitter {
  readonly signals: string[] = []
  readonly process: { pid: number | undefined; kill(name: string): void } = {
    pid: 1,
    kill: (name: string) => this.signals.push(name),
  }
  listens = () => this.emit('listening', { port: 4100 })
  ends = () => this.emit('exit', null, 'SIGKILL')
}

function some(count: number) {
  const workers: FakeWorker[] = []
  const clock = new FakeClock()
  const failures: string[] = []
  const processes = new IntakeProcesses(
    {
      fork() {
        const worker = new FakeWorker()
        workers.push(worker)
        return worker as unknown as Worker
      },
      log: { info() {}, warn() {}, error() {} },
      after: (delayMs, run) => clock.after(delayMs, run),
    },
    { count, onFailure: ({ message }) => failures.push(message) },
  )
  return { workers, clock, failures, processes }
}

async function started(count: number) {
  const all = some(count)
  const port = all.processes.start()
  for (let index = 0; index < count; index++) {
    await until(() => all.workers.length > index)
    all.workers[index]?.listens()
  }
  expect(await port).toBe(4100)
  return all
}

/** A few turns of the queue of promises. */
async function until(holds: () => boolean): Promise<void> {
  for (let turn = 0; turn < 20 && !holds(); turn++) await Promise.resolve()
  expect(holds()).toBe(true)
}

describe('processes that take reports in', () => {
  it('are as many as asked for, at one port, and one that ends has another in its place', async () => {
    const { workers, clock, failures } = await started(3)
    expect(workers).toHaveLength(3)
    workers[1]?.ends()
    await clock.advance(REPLACED_AFTER_MS - 1)
    expect(workers).toHaveLength(3)
    await clock.advance(1)
    expect(workers).toHaveLength(4)
    workers[3]?.listens()
    workers[3]?.ends()
    await clock.advance(REPLACED_AFTER_MS)
    expect(workers).toHaveLength(5)
    expect(failures).toEqual([])
  })

  it('are given up where one cannot be replaced', async () => {
    const { workers, clock, failures } = await started(1)
    workers[0]?.ends()
    await clock.advance(REPLACED_AFTER_MS)
    workers[1]?.ends()
    await until(() => failures.length > 0)
    expect(failures).toEqual(['A process that was to take reports in ended before it listened (SIGKILL).'])
    await clock.advance(10 * REPLACED_AFTER_MS)
    expect(workers).toHaveLength(2)
  })

  it('do not begin where the first does not', async () => {
    const { workers, processes } = some(2)
    const port = processes.start()
    workers[0]?.ends()
    await expect(port).rejects.toThrow('ended before it listened')
    expect(workers).toHaveLength(1)
  })

  it('are told to end, waited for, and not replaced then', async () => {
    const { workers, clock, processes } = await started(2)
    let isOver = false
    const stopping = processes.stop().then(() => {
      isOver = true
    })
    expect(workers.map(({ signals }) => signals)).toEqual([['SIGTERM'], ['SIGTERM']])
    workers[0]?.ends()
    await Promise.resolve()
    expect(isOver).toBe(false)
    workers[1]?.ends()
    await stopping
    await clock.advance(10 * REPLACED_AFTER_MS)
    expect(workers).toHaveLength(2)
  })

  it('are not replaced either where one had just ended', async () => {
    const { workers, clock, processes } = await started(1)
    workers[0]?.ends()
    await processes.stop()
    await clock.advance(10 * REPLACED_AFTER_MS)
    expect(workers).toHaveLength(1)
  })

  it('that do not end are killed', async () => {
    const { workers, clock, processes } = await started(2)
    const stopping = processes.stop()
    workers[0]?.ends()
    await clock.advance(KILLED_AFTER_MS)
    expect(workers.map(({ signals }) => signals)).toEqual([['SIGTERM'], ['SIGTERM', 'SIGKILL']])
    workers[1]?.ends()
    await stopping
  })

  it('that cannot be started at all are said, and not waited for', async () => {
    const { workers, processes } = some(1)
    const port = processes.start()
    if (workers[0]) workers[0].process.pid = undefined
    workers[0]?.emit('error', new Error('spawn EAGAIN'))
    await expect(port).rejects.toThrow('spawn EAGAIN')
    await processes.stop()
    expect(workers[0]?.signals).toEqual([])
  })

  it('that had not begun when they were told to end never do', async () => {
    const { workers, processes } = some(3)
    const port = processes.start()
    workers[0]?.listens()
    const stopping = processes.stop()
    expect(await port).toBe(4100)
    expect(workers).toHaveLength(1)
    workers[0]?.ends()
    await stopping
  })
})
