import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import type { NodeFacts, Sums } from '@/lib/method/report'

/** The last report held of an agent. Written by ingest in multi-row statements, so keys are plain columns. */
export const AgentStateSchema = defineEntity({
  name: 'AgentState',
  tableName: 'agent_states',
  properties: {
    agentId: p.uuid().primary(),
    overlayId: p.uuid(),
    incarnation: p.text(),
    /** The one before: what still arrives of it is late. */
    previousIncarnation: p.text().nullable(),
    reportNumber: p.bigint('number'),
    ordersSequence: p.bigint('number'),
    /** Only meaningful added up over agents: kept apart from the node's facts on purpose. */
    sums: p.json<Sums>(),
    node: p.json<NodeFacts>(),
    receivedAt: p.datetime(),
  },
})
export interface AgentState extends InferEntity<typeof AgentStateSchema> {}
