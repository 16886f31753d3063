import { type AuditFault, SUMS_SCALE } from '../report'
import type { Statement } from '../statement'
import type { HeardColony } from './arrivals'
import { addBirths, type BirthClaim, birthsOff, noBirths, SURE } from './births'
import type { OrdersHistory } from './orders-history'

/**
 * Declared walker-time over what arrived. Kills come between the count of walker-time and the departures, so honest nodes lie
 * above 1 where many die (up to 1.6); on links that lose a third of their frames the sender holds them to be down more often than
 * the receiver (2.7 measured). The collector sees smaller lies exactly.
 */
export const MOST_WALKER_TIME = 4
export const LEAST_WALKER_TIME = 0.6
/** Share of its size by which a stated z̄ may lie outside what was heard in frames of late. */
export const MOST_APART = 0.35
/** Fewer arrivals between two statements do not tell what its walkers are made of. */
export const LEAST_FOUND = 20
/** What a block still counts for when the next one is judged: rates of births swing from one order to the next. */
export const KEPT_PER_BLOCK = 0.75
/** So many blocks, or statements, in a row are a fault. */
export const BAD_CLAIMS = 3
/** Births are summed over blocks, so that one outlier is bad several times over. */
export const BAD_BIRTHS = 5

/** What came of one colony since the last statement, and how z̄ went of late. */
interface Heard {
  seeding: number
  x: number
  y: number
  weightMs: number
  ms: number
  /** Lowest and highest z̄ in buckets of one report interval: this one and the three before. */
  means: { least: number; most: number }[]
}
const MEAN_BUCKETS = 4

interface Block extends BirthClaim {
  found: number
  declared: number
  ms: number
}

const blank = (): Block => ({ ...noBirths(), found: 0, declared: 0, ms: 0 })

const KEYS = Object.keys(blank()) as (keyof Block)[]

export interface ClaimFault {
  fault: AuditFault
  ratio: number
}

/** What a neighbour told the collector, by receipt, against what arrived here and what it declared in frames. */
export class ClaimAudit {
  private readonly heard = new Map<number, Heard>()
  private bucketMs = 0
  private last: { statement: Statement; atMs: number } | null = null
  private block = blank()
  private readonly bad: Record<'walker-time' | 'births' | 'two-accounts', number> = {
    'walker-time': 0,
    births: 0,
    'two-accounts': 0,
  }
  /** Blocks added up, older ones forgotten. */
  readonly kept = blank()
  /** How far a stated z̄ was from those heard, as a share. */
  lastApart = 0

  noteFrame(
    parts: readonly HeardColony[],
    { elapsedMs, weight, intervalMs }: { elapsedMs: number; weight: number; intervalMs: number },
  ): void {
    this.bucketMs += elapsedMs
    const turn = this.bucketMs >= intervalMs
    if (turn) this.bucketMs = 0
    for (const { colony, seeding, x, y, mean, counts } of parts) {
      if (!counts) continue
      let heard = this.heard.get(colony)
      if (heard?.seeding !== seeding) {
        heard = { seeding, x: 0, y: 0, weightMs: 0, ms: 0, means: [] }
        this.heard.set(colony, heard)
      }
      heard.x += x
      heard.y += y
      heard.weightMs += weight * elapsedMs
      heard.ms += elapsedMs
      const { means } = heard
      if (turn || means.length === 0) means.unshift({ least: mean, most: mean })
      if (means.length > MEAN_BUCKETS) means.pop()
      const now = means[0]!
      if (mean < now.least) now.least = mean
      if (mean > now.most) now.most = mean
    }
  }

  noteStatement(
    statement: Statement,
    orders: OrdersHistory,
    { nowMs, intervalMs, blockMs }: { nowMs: number; intervalMs: number; blockMs: number },
  ): ClaimFault | null {
    const { last } = this
    if (last && statement.reportNumber <= last.statement.reportNumber) return null
    this.last = { statement, atMs: nowMs }
    const apart = this.twoAccounts(statement)
    if (last) this.add(last.statement, statement, orders, last.atMs - 2 * intervalMs)
    for (const since of this.heard.values()) {
      since.x = 0
      since.y = 0
      since.weightMs = 0
      since.ms = 0
    }
    this.block.ms += last ? nowMs - last.atMs : 0
    if (apart) return apart
    return this.block.ms >= blockMs ? this.judge() : null
  }

  private twoAccounts({ colonies }: Statement): ClaimFault | null {
    let apart = 0
    let size = 0
    let noise = 0
    let ratio = 1
    let largest = 0
    for (const { colony, seeding, mean } of colonies) {
      const heard = this.heard.get(colony)
      if (heard?.seeding !== seeding || heard.means.length < MEAN_BUCKETS) continue
      const stated = mean / SUMS_SCALE
      const least = Math.min(...heard.means.map((bucket) => bucket.least))
      const most = Math.max(...heard.means.map((bucket) => bucket.most))
      const off = stated < least ? least - stated : Math.max(0, stated - most)
      const scale = Math.max(Math.abs(stated), Math.abs(least), Math.abs(most))
      apart += off ** 2
      size += scale ** 2
      noise += 9 * scale
      if (off > largest) {
        largest = off
        ratio = stated / ((least + most) / 2)
      }
    }
    this.lastApart = size > 0 ? Math.sqrt(Math.max(0, apart - noise) / size) : 0
    return this.streak('two-accounts', this.lastApart > MOST_APART, ratio)
  }

  private add(before: Statement, now: Statement, orders: OrdersHistory, sinceMs: number): void {
    const { block } = this
    for (const claim of now.colonies) {
      const old = before.colonies.find(
        ({ colony, seeding }) => colony === claim.colony && seeding === claim.seeding,
      )
      const since = this.heard.get(claim.colony)
      if (!old || since?.seeding !== claim.seeding || since.ms === 0) continue
      const walkerTime = (claim.walkerTime - old.walkerTime) / SUMS_SCALE
      block.declared += (walkerTime * since.weightMs) / since.ms
      const found = since.x + since.y
      block.found += found
      // Which of its walkers it is that come says which rate counts.
      const rates = orders.ratesSince(sinceMs, claim.colony, claim.seeding)
      if (rates.length === 0 || found < LEAST_FOUND) continue
      const declared = { births: claim.births - old.births, culls: claim.culls - old.culls }
      addBirths(block, declared, rates, since.x / found, walkerTime)
    }
  }

  private judge(): ClaimFault | null {
    const { block, kept } = this
    for (const key of KEYS) kept[key] = KEPT_PER_BLOCK * kept[key] + block[key]
    this.block = blank()
    const { found, declared } = kept
    const out = Math.abs(declared - found) > SURE * Math.sqrt(Math.max(declared, found))
    const ratio = found > 0 ? declared / found : declared > 0 ? Number.POSITIVE_INFINITY : 1
    const walkerTime = this.streak(
      'walker-time',
      out && (ratio > MOST_WALKER_TIME || ratio < LEAST_WALKER_TIME),
      ratio,
    )
    const births = birthsOff(kept)
    return walkerTime ?? this.streak('births', births !== 1, births)
  }

  private streak(
    fault: 'walker-time' | 'births' | 'two-accounts',
    isBad: boolean,
    ratio: number,
  ): ClaimFault | null {
    this.bad[fault] = isBad ? this.bad[fault] + 1 : 0
    return this.bad[fault] >= (fault === 'births' ? BAD_BIRTHS : BAD_CLAIMS) ? { fault, ratio } : null
  }
}
