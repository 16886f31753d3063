import { defineEntity, type InferEntity, p } from '@mikro-orm/core'

/** An agent that left and whose name another has taken, while its last pass lasts. */
export const ShutAgentSchema = defineEntity({
  name: 'ShutAgent',
  tableName: 'shut_agents',
  properties: {
    agentId: p.uuid().primary(),
    overlayId: p.uuid(),
    until: p.datetime(),
  },
})
export interface ShutAgent extends InferEntity<typeof ShutAgentSchema> {}
