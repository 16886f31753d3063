import { readMessage } from '@/agent/link/read-message'
import { WalkNode } from '@/lib/method/node'
import { createRandom } from '@/lib/method/random'
import type { LinkPeer } from '@/lib/protocol'
import { someOrders } from './frames'
import { Fuzz } from './fuzz'
import { NOW_SECONDS, type TestOverlay } from './passes'

/** Messages read and taken in as from proven peers, without sockets: none of them ends anything. @returns what became of them */
export function fuzzIntake(overlay: TestOverlay, seed: string, messages: number): Map<string, number> {
  const fuzz = new Fuzz(overlay, seed)
  const node = new WalkNode({ random: createRandom(seed) }, { agentId: 'gul-04', incarnation: 'gul-04.0' })
  node.adopt(someOrders(7), 0, 0)
  const outcomes = new Map<string, number>()
  for (let index = 0; index < messages; index++) {
    const nowMs = index * 5
    const agentId = `eel-${index % 48}`
    const incarnation = `${agentId}.${Math.floor(index / 2_000)}`
    const peer: LinkPeer = {
      agentId,
      name: agentId,
      mask: null,
      key: '',
      incarnation,
      version: index % 5 === 0 ? 1 : 2,
      passExpiresAt: NOW_SECONDS,
    }
    node.addLink(agentId, incarnation, nowMs)
    const message = readMessage(fuzz.message(0.1), peer, overlay.trust, node.ordersSequence)
    let outcome: string = message.kind
    if (message.kind === 'refused') outcome = message.close
    if (message.kind === 'frame') {
      const received = node.receive(agentId, incarnation, message.frame, nowMs)
      outcome = received.kind === 'ok' ? 'taken' : received.reason
    }
    outcomes.set(outcome, (outcomes.get(outcome) ?? 0) + 1)
    if (index % 40 === 0) node.tick(nowMs)
  }
  return outcomes
}
