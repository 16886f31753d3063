import type { ColonyFrame } from '../frame'

/** An acknowledgement that falls short this often in a row is a fault. */
export const SHORT_ACKNOWLEDGEMENTS = 3

/**
 * Whoever says it heard frame n has taken in the totals of frame n: that follows from the settling alone, with any loss,
 * repetition or overtaking, so there is no false alarm to weigh. One frame at a time is remembered, in so far as the other end is
 * known to be in its seedings.
 */
export class AcknowledgementAudit {
  private mark: { number: number; colonies: readonly ColonyFrame[] } | null = null
  private heard: readonly ColonyFrame[] = []
  private short = 0

  noteSent(number: number, colonies: readonly ColonyFrame[]): void {
    if (this.mark || this.heard.length === 0) return
    this.mark = { number, colonies: colonies.filter((part) => partOf(this.heard, part) !== undefined) }
  }

  /** For the newest frames only. @returns acknowledged over sent where that is a fault */
  noteHeard(heardNumber: number, colonies: readonly ColonyFrame[]): number | null {
    const { mark } = this
    this.heard = colonies
    if (!mark || heardNumber < mark.number) return null
    this.mark = null
    let sent = 0
    let acknowledged = 0
    let isShort = false
    for (const part of mark.colonies) {
      const said = partOf(colonies, part)
      if (!said) continue
      sent += part.sentX + part.sentY
      acknowledged += said.receivedX + said.receivedY
      if (said.receivedX < part.sentX || said.receivedY < part.sentY) isShort = true
    }
    if (sent === 0) return null
    this.short = isShort ? this.short + 1 : 0
    return this.short >= SHORT_ACKNOWLEDGEMENTS ? acknowledged / sent : null
  }
}

function partOf(colonies: readonly ColonyFrame[], { colony, seeding }: ColonyFrame): ColonyFrame | undefined {
  return colonies.find((part) => part.colony === colony && part.seeding === seeding)
}
