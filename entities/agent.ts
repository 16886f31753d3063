import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { OverlaySchema } from './overlay'
import { TeamSchema } from './team'

export const AGENT_STATES = ['joined', 'left', 'revoked', 'left-out'] as const
export type AgentStateName = (typeof AGENT_STATES)[number]

export const AgentSchema = defineEntity({
  name: 'Agent',
  tableName: 'agents',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    /** Whose code it used; left out, the team that owns the overlay. */
    team: () => p.manyToOne(TeamSchema).ref(false).nullable(),
    /** Unique in its overlay among those that have not left. */
    name: p.text(),
    /** Ed25519, base64url of the raw 32 bytes. */
    publicKey: p.text(),
    labels: p.json<Record<string, string>>(),
    /** ws:// or wss:// URL that neighbours may dial. */
    address: p.text().nullable(),
    version: p.text(),
    /** How the overlay itself knows the node. */
    node: p.text().nullable(),
    /** A fingerprint of the machine, as the agent gives it. */
    host: p.text().nullable(),
    joinedAt: p.datetime(),
    state: p.enum([...AGENT_STATES]).default('joined'),
    /** When it left, was revoked or left out. */
    endedAt: p.datetime().nullable(),
    leftOutBecause: p.text().nullable(),
    /** The signed time of the last change of key: an earlier one is a replay. */
    keyChangedAt: p.datetime().nullable(),
    /** No pass of it is good for longer. */
    passEndsAt: p.datetime().nullable(),
  },
})
export interface Agent extends InferEntity<typeof AgentSchema> {}
