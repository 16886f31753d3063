import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { OverlaySchema } from './overlay'

export const AGENT_STATES = ['joined', 'left', 'revoked'] as const

export const AgentSchema = defineEntity({
  name: 'Agent',
  tableName: 'agents',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    /** Unique in its overlay. */
    name: p.text(),
    /** Ed25519, base64url of the raw 32 bytes. */
    publicKey: p.text(),
    labels: p.json<Record<string, string>>(),
    /** ws:// or wss:// URL that neighbours may dial. */
    address: p.text().nullable(),
    version: p.text(),
    joinedAt: p.datetime(),
    state: p.enum([...AGENT_STATES]).default('joined'),
    /** When it left or was revoked. */
    endedAt: p.datetime().nullable(),
  },
  uniques: [{ properties: ['overlay', 'name'] }],
})
export interface Agent extends InferEntity<typeof AgentSchema> {}
