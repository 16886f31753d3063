/** One node of the overlay with an agent inside it. */
import { type Agent, type AgentComponents, createAgent, describeCollectorError, enrol } from '../../agent'
import { addressOf, framesOver } from './frames-over'
import type { OverlayNode } from './overlay-node'

export interface MeasuredNodeInit {
  code: string
  labels: Record<string, string>
  version: string
}

// shown from here
/** Enrols the node and runs its agent; each connection the overlay opens becomes a link that is measured. */
export async function measure(
  overlay: OverlayNode,
  components: Omit<AgentComponents, 'transport'>,
  { code, labels, version }: MeasuredNodeInit,
  signal: AbortSignal,
): Promise<Agent> {
  // A program that lives on keeps its key and the reply, and enrols no second time.
  const enrolled = await enrol(
    components,
    { code, name: overlay.name, labels, address: null, version },
    signal,
  )
  if (!enrolled.ok) throw new Error(describeCollectorError(enrolled.error))
  const { agentId, overlay: joined, overlayKey, pass, weights, pace } = enrolled.value
  const agent = createAgent(
    { ...components, transport: framesOver(overlay) },
    {
      identity: { agentId, overlayId: joined.id, overlayKey, pass, weights },
      version,
      pace,
      // What is measured is the overlay's connection itself; the reading says so.
      linkKind: 'connection',
      listen: { host: overlay.name, port: 0 },
    },
  )
  overlay.watch({
    opened: ({ name, openedHere }) => {
      if (openedHere) agent.addNeighbour({ address: addressOf(name) })
    },
  })
  await agent.start(signal)
  return agent
}
// shown to here
