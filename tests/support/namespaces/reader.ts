import type { OverlayNode, Reading } from '@/lib/data/dto'
import { listNodes } from '@/lib/data/nodes'
import { getReading } from '@/lib/data/readings'
import type { Sums } from '@/lib/method/report'
import type { TestDatabase } from '../database'
import { inOneLine } from '../e2e/reading-stream'
import { callAsUser } from '../people'

const LOOK_EVERY_MS = 100
const TOLD = 12

/** What a viewer is shown of one overlay, looked at again and again. */
export class OverlayReader {
  /** Every reading seen, oldest first. */
  readonly seen: Reading[] = []
  readonly #database: TestDatabase
  readonly #userId: string
  readonly #slug: string

  constructor({ database }: { database: TestDatabase }, init: { userId: string; slug: string }) {
    this.#database = database
    this.#userId = init.userId
    this.#slug = init.slug
  }

  async reading(): Promise<Reading> {
    const reading = await getReading(await this.#call(), this.#slug)
    if (reading.at !== this.seen.at(-1)?.at) this.seen.push(reading)
    return reading
  }

  async nodes(): Promise<OverlayNode[]> {
    const { items } = await listNodes(await this.#call(), this.#slug, { limit: 200 })
    return items
  }

  /** The last sums stored of every agent. */
  async sums(): Promise<Sums[]> {
    const rows: { sums: Sums }[] = await this.#database.orm.em
      .fork()
      .getConnection()
      .execute('select s.sums from agent_states s join overlays o on o.id = s.overlay_id where o.slug = ?', [
        this.#slug,
      ])
    return rows.map(({ sums }) => sums)
  }

  /** The first new reading from now on that is as wanted. @throws with the last readings after `deadlineMs` */
  async until(
    what: string,
    wanted: (reading: Reading) => boolean | Promise<boolean>,
    deadlineMs: number,
    explain: () => string | Promise<string> = () => '',
  ): Promise<Reading> {
    const startedAtMs = performance.now()
    let last = this.seen.at(-1)?.at
    for (;;) {
      const reading = await this.reading()
      if (reading.at !== last && (await wanted(reading))) return reading
      last = reading.at
      if (performance.now() - startedAtMs > deadlineMs) break
      await new Promise((resolve) => setTimeout(resolve, LOOK_EVERY_MS))
    }
    const told = this.seen.slice(-TOLD).map(inOneLine).join('\n')
    throw new Error(
      `Not within ${deadlineMs / 1000} s: ${what}.\nLast readings:\n${told}\n${await explain()}`,
    )
  }

  #call() {
    return callAsUser(this.#database, this.#userId, new Date())
  }
}
