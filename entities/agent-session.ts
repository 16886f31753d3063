import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { AgentSchema } from './agent'

export const AgentSessionSchema = defineEntity({
  name: 'AgentSession',
  tableName: 'agent_sessions',
  properties: {
    /** SHA-256 (hex) of the session token. */
    tokenHash: p.text().primary(),
    agent: () => p.manyToOne(AgentSchema).ref(false),
    expiresAt: p.datetime(),
    /** Of the proof that opened it; each is used once. */
    nonce: p.text().nullable(),
    /** When the agent's latest pass ends, so that a new one is sent in time. */
    passExpiresAt: p.datetime().nullable(),
  },
})
export interface AgentSession extends InferEntity<typeof AgentSessionSchema> {}
