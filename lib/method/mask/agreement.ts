/** What a frame says of the rounds to come: which the sender will mask with the receiver, and of which it has heard the same. */
export interface RoundSaying {
  ready: readonly number[]
  heard: readonly number[]
}

/** Rounds said in one frame. */
export const MOST_ROUNDS = 8

/**
 * One pair's word on which rounds they mask with each other. What is said is never taken back, so frames may be lost, repeated and
 * reordered; whether the link goes down meanwhile does not matter either. An end masks a round once it has heard both that
 * the other will and that the other has heard the same of it: the two differ only where frames cease to arrive, in one direction
 * alone, just then. Such a round does not close, and the next one takes its place.
 */
export class Agreement {
  private readonly own = new Map<number, boolean>()
  private readonly peerReady = new Set<number>()
  private readonly peerHeard = new Set<number>()

  /** Whether this end will mask the round, decided once: `isEarly` where there is time enough to agree. */
  decide(round: number, isEarly: boolean): void {
    if (!this.own.has(round)) this.own.set(round, isEarly)
  }

  note({ ready, heard }: RoundSaying): void {
    for (const round of ready) this.peerReady.add(round)
    for (const round of heard) this.peerHeard.add(round)
  }

  isAgreed(round: number): boolean {
    return this.own.get(round) === true && this.peerReady.has(round) && this.peerHeard.has(round)
  }

  /** The newest rounds, oldest first. */
  saying(): RoundSaying {
    const ready = [...this.own].flatMap(([round, will]) => (will ? [round] : []))
    return { ready: newest(ready), heard: newest([...this.peerReady]) }
  }

  /** Forgets rounds before this one. */
  forget(before: number): void {
    for (const rounds of [this.own, this.peerReady, this.peerHeard])
      for (const round of rounds.keys()) if (round < before) rounds.delete(round)
  }
}

function newest(rounds: readonly number[]): number[] {
  return [...rounds].sort((a, b) => a - b).slice(-MOST_ROUNDS)
}
