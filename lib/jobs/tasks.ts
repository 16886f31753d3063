import { dropPartitions, type EntityManager, ensurePartitions } from '@/lib/db'
import type { Log } from '@/lib/http/runtime'
import { forgetEvents } from './events'
import { rollUp } from './roll-up'
import { forgetNodes, thinSnapshots } from './snapshots'

export interface TaskComponents {
  forkEm(): Promise<EntityManager>
  now(): Date
  log: Log
}

export interface Task {
  name: string
  /** When, as minute, hour, day, month and weekday in UTC. */
  when: string
  run(components: TaskComponents): Promise<void>
}

/** Every job there is. Each may run late, twice, or in another process each time. */
export const TASKS: readonly Task[] = [
  {
    name: 'roll-up',
    when: '* * * * *',
    run: async ({ forkEm, now }) => {
      await rollUp(await forkEm(), now().getTime())
    },
  },
  {
    name: 'thin-snapshots',
    when: '4 * * * *',
    run: async ({ forkEm, now }) => {
      await thinSnapshots(await forkEm(), now().getTime())
      await forgetNodes(await forkEm(), now())
    },
  },
  {
    name: 'forget-events',
    when: '41 3 * * *',
    run: async ({ forkEm, now }) => {
      await forgetEvents(await forkEm(), now())
    },
  },
  {
    name: 'keep-partitions',
    when: '17 */6 * * *',
    run: async ({ forkEm, now, log }) => {
      const made = await ensurePartitions(await forkEm(), now())
      const dropped = await dropPartitions(await forkEm(), now())
      if (made.length + dropped.length > 0) log.info({ made, dropped }, 'partitions kept')
    },
  },
]
