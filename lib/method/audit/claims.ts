import { type AuditFault, SUMS_SCALE } from '../report'
import { MOST_RECEIPT_AGE_INTERVALS, RECEIPT_INTERVALS, type Statement } from '../statement'
import type { HeardColony } from './arrivals'
import { addBirths, type BirthClaim, birthsOff, noBirths } from './births'
import type { OrdersHistory } from './orders-history'
import { type Mark, WalkerTimeAudit } from './walker-time'

/** A statement is of the time up to this long before it came: its receipt and the frame were on their way. */
export const STATEMENT_AGE_INTERVALS = MOST_RECEIPT_AGE_INTERVALS + 2
/** Share of its size by which a stated z̄ may lie outside what was heard in frames of late. */
export const MOST_APART = 0.35
/** Fewer arrivals between two statements do not tell what its walkers are made of. */
export const LEAST_FOUND = 20
/** What a block still counts for when the next one is judged: rates of births swing from one order to the next. */
export const KEPT_PER_BLOCK = 0.75
/** So many statements in a row are a fault. */
export const BAD_CLAIMS = 3
/** Births are summed over blocks, so that one outlier is bad several times over. */
export const BAD_BIRTHS = 5

/** What came of one colony since it was first heard, and how z̄ went of late. */
interface Heard {
  seeding: number
  x: number
  y: number
  weightMs: number
  ms: number
  /** Lowest and highest z̄ in buckets of one report interval: this one and those before. */
  means: { least: number; most: number }[]
}
const MEAN_BUCKETS = STATEMENT_AGE_INTERVALS + 1

export interface ClaimFault {
  fault: AuditFault
  ratio: number
}

/** What a neighbour told the collector, by receipt, against what arrived here and what it declared in frames. */
export class ClaimAudit {
  private readonly heard = new Map<number, Heard>()
  private bucketMs = 0
  private last: { statement: Statement; mark: Mark } | null = null
  private block: BirthClaim = noBirths()
  private blockMs = 0
  private badBirths = 0
  private twoAccountsInARow = 0
  /** Blocks added up, older ones forgotten. */
  readonly kept: BirthClaim = noBirths()
  readonly walkerTime = new WalkerTimeAudit()
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
    const mark = this.markOf(statement, nowMs)
    this.last = { statement, mark }
    const apart = this.twoAccounts(statement)
    if (last) this.addBirths(last, { statement, mark }, orders, intervalMs)
    const spacing = {
      baseMs: BASE_RECEIPTS * RECEIPT_INTERVALS * intervalMs,
      ageMs: STATEMENT_AGE_INTERVALS * intervalMs,
      leastMs: (RECEIPT_INTERVALS / 2) * intervalMs,
    }
    const walkerTime = this.walkerTime.note(mark, spacing)
    if (apart) return apart
    if (walkerTime !== null) return { fault: 'walker-time', ratio: walkerTime }
    return this.blockMs >= blockMs ? this.judgeBirths() : null
  }

  private markOf({ colonies }: Statement, atMs: number): Mark {
    const mark: Mark = { atMs, colonies: new Map() }
    for (const { colony, seeding, walkerTime } of colonies) {
      const heard = this.heard.get(colony)
      if (heard?.seeding !== seeding) continue
      const { x, y, weightMs, ms } = heard
      mark.colonies.set(colony, { seeding, walkerTime: walkerTime / SUMS_SCALE, x, y, weightMs, ms })
    }
    return mark
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
    this.twoAccountsInARow = this.lastApart > MOST_APART ? this.twoAccountsInARow + 1 : 0
    return this.twoAccountsInARow >= BAD_CLAIMS ? { fault: 'two-accounts', ratio } : null
  }

  private addBirths(
    before: { statement: Statement; mark: Mark },
    now: { statement: Statement; mark: Mark },
    orders: OrdersHistory,
    intervalMs: number,
  ): void {
    const sinceMs = before.mark.atMs - STATEMENT_AGE_INTERVALS * intervalMs
    this.blockMs += now.mark.atMs - before.mark.atMs
    for (const claim of now.statement.colonies) {
      const { colony, seeding } = claim
      const said = before.statement.colonies.find((old) => old.colony === colony && old.seeding === seeding)
      const [from, to] = [before.mark.colonies.get(colony), now.mark.colonies.get(colony)]
      if (!said || !from || to?.seeding !== from.seeding) continue
      const x = to.x - from.x
      const found = x + to.y - from.y
      // Which of its walkers it is that come says which rate counts.
      const rates = orders.ratesSince(sinceMs, colony, seeding)
      if (rates.length === 0 || found < LEAST_FOUND) continue
      const declared = { births: claim.births - said.births, culls: claim.culls - said.culls }
      addBirths(this.block, declared, rates, x / found, to.walkerTime - from.walkerTime)
    }
  }

  private judgeBirths(): ClaimFault | null {
    const { block, kept } = this
    for (const key of BIRTH_KEYS) kept[key] = KEPT_PER_BLOCK * kept[key] + block[key]
    this.block = noBirths()
    this.blockMs = 0
    const ratio = birthsOff(kept)
    this.badBirths = ratio === 1 ? 0 : this.badBirths + 1
    return this.badBirths >= BAD_BIRTHS ? { fault: 'births', ratio } : null
  }
}

const BIRTH_KEYS = ['net', 'turnover', 'least', 'most'] as const
/** Walker-time is judged over so many receipts. */
const BASE_RECEIPTS = 4
