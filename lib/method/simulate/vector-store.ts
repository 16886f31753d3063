import type { ControlSettings, HeldVector } from '../control'
import type { MaskStream } from '../mask'
import { createRandom } from '../random'
import type { Report } from '../report'

/** Rounds kept. */
const MOST_ROUNDS = 24

export interface VectorStoreInit {
  settings: Pick<ControlSettings, 'disclosure'>
  masks?: 'masked' | 'bare'
}

/** The masked part of a simulated overlay: the secrets of its pairs, and the vectors that its collector has stored. */
export class VectorStore {
  private readonly isMasked: boolean
  private readonly isBare: boolean
  private readonly rounds = new Map<number, Map<string, HeldVector>>()

  constructor({ settings, masks }: VectorStoreInit) {
    this.isMasked = settings.disclosure !== 'named'
    this.isBare = masks === 'bare'
  }

  /** In the place of a key exchange: whoever knows both ends' starts knows the stream, as both of them do. */
  maskOf(agentId: string, incarnation: string): (peer: string, peerIncarnation: string) => MaskStream {
    const own = `${agentId} ${incarnation}`
    return (peer, peerIncarnation) => {
      const pair = [own, `${peer} ${peerIncarnation}`].sort().join(' ')
      return (round, entries) => {
        if (this.isBare) return new BigUint64Array(entries)
        const random = createRandom(`${pair} ${round}`)
        const words = Uint32Array.from({ length: 2 * entries }, () => random.uint32())
        return new BigUint64Array(words.buffer)
      }
    }
  }

  keep(agentId: string, { masked = [] }: Report): void {
    for (const { round, sums } of masked) {
      const held = this.rounds.get(round) ?? new Map<string, HeldVector>()
      this.rounds.set(round, held.set(agentId, { agentId, round, sums }))
    }
    const numbers = [...this.rounds.keys()].sort((a, b) => b - a)
    for (const old of numbers.slice(MOST_ROUNDS)) this.rounds.delete(old)
  }

  /** Null where links are named. */
  of(rounds: readonly number[]): HeldVector[] | null {
    return this.isMasked ? rounds.flatMap((round) => [...(this.rounds.get(round)?.values() ?? [])]) : null
  }
}
