/** Versions, offers, the signing key and retiring, as people and programs are shown them. Safe to import in the browser. */
import { z } from 'zod'

const at = z.iso.datetime()

/** A version of the agent that this server holds. */
export const agentReleaseSchema = z.object({
  version: z.string(),
  sha256: z.string(),
  bytes: z.number().int(),
  addedAt: at,
  /** The one /agent/thinspan-agent.mjs serves by itself. */
  current: z.boolean(),
})
export type AgentRelease = z.infer<typeof agentReleaseSchema>

const labelPair = z.object({ key: z.string(), value: z.string() })
export const upgradeOfferDtoSchema = z.object({
  id: z.string(),
  version: z.string(),
  /** Whom it is offered to; null for every agent of the overlay. */
  label: labelPair.nullable(),
  offeredAt: at,
  offeredBy: z.string().nullable(),
  haltedAt: at.nullable(),
  /** Agents it is offered to, by what became of it. `runs`: already that version. */
  counts: z.object({
    offered: z.number().int(),
    runs: z.number().int(),
    failed: z.number().int(),
    /** Heard with another version and without word of the offer yet. */
    waiting: z.number().int(),
    /** Agents that take no upgrades by themselves. */
    declined: z.number().int(),
  }),
})
export type UpgradeOfferDto = z.infer<typeof upgradeOfferDtoSchema>
export const upgradesSchema = z.object({
  releases: z.array(agentReleaseSchema),
  offers: z.array(upgradeOfferDtoSchema),
  /** Versions run by joined agents, most first. */
  versions: z.array(z.object({ version: z.string(), agents: z.number().int() })),
})
export type Upgrades = z.infer<typeof upgradesSchema>

export const newUpgradeOfferSchema = z.object({
  version: z.string().min(1, 'Choose a version.').max(40),
  label: labelPair.nullable().default(null),
})

/** The key that signs passes and orders. Public parts only. */
export const signingKeySchema = z.object({
  publicKey: z.string(),
  since: at,
  ringVersion: z.number().int(),
  /** While a rotation is under way: the key to come, how many agents hold it, and when it takes over at the latest. */
  next: z
    .object({ publicKey: z.string(), heldBy: z.number().int(), of: z.number().int(), takesOverAt: at })
    .nullable(),
  /** The key before, good until passes under it have ended. */
  previous: z.object({ publicKey: z.string(), until: at }).nullable(),
})
export type SigningKey = z.infer<typeof signingKeySchema>

export const RETIRE_MOST_HOURS = 24 * 365
export const overlayChangeSchema = z.object({
  /** Null: never. */
  retireAfterHours: z
    .number()
    .int('Give whole hours.')
    .min(1, 'Give at least one hour.')
    .max(RETIRE_MOST_HOURS, 'Give at most a year of hours.')
    .nullable(),
})
