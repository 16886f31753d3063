import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import type { Complaint, NodeFacts, Sums } from '@/lib/method/report'

/** The last report held of an agent. Written by ingest in multi-row statements, so keys are plain columns. */
export const AgentStateSchema = defineEntity({
  name: 'AgentState',
  tableName: 'agent_states',
  properties: {
    agentId: p.uuid().primary(),
    overlayId: p.uuid(),
    incarnation: p.text(),
    /** Those before, newest first: what still arrives of them is late. */
    formerIncarnations: p.json<string[]>().default('[]'),
    /** Of the newest of them when it was replaced. */
    previousReportNumber: p.bigint('number').nullable(),
    /** How many reports of former incarnations came since: more than a straggler, and two programs have one key. */
    lateReports: p.integer().default(0),
    reportNumber: p.bigint('number'),
    ordersSequence: p.bigint('number'),
    /** Only meaningful added up over agents: kept apart from the node's facts on purpose. */
    sums: p.json<Sums>().columnType('json'),
    node: p.json<NodeFacts>().columnType('json'),
    complaints: p.json<Complaint[]>().default('[]'),
    /** It came through neighbours. */
    relayed: p.boolean().default(false),
    receivedAt: p.datetime(),
  },
})
export interface AgentState extends InferEntity<typeof AgentStateSchema> {}
