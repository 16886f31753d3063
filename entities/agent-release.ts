import { defineEntity, type InferEntity, p } from '@mikro-orm/core'

/** A version of the agent as one file, kept so that it can be offered after the server has moved on. */
export const AgentReleaseSchema = defineEntity({
  name: 'AgentRelease',
  tableName: 'agent_releases',
  properties: {
    version: p.text().primary(),
    /** Of the bytes, hexadecimal. */
    sha256: p.text(),
    bytes: p.blob().lazy(),
    addedAt: p.datetime(),
  },
})
export interface AgentRelease extends InferEntity<typeof AgentReleaseSchema> {}
