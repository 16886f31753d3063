/** What people and programs are shown of new links that would help. Safe to import in the browser. */
import { z } from 'zod'
import { SIDES } from './dto'

const at = z.iso.datetime()
export const REINFORCE_LINKS_MOST = 10
export const REINFORCE_LINKS_DEFAULT = 3

/** exact: λ₂ of the named links, each new one the best given those before. first-order: upper bounds by the nodes' values. */
export const REINFORCE_METHODS = ['exact', 'first-order'] as const
/** Why nothing can be proposed. */
export const NOTHING_REASONS = [
  'no-reading',
  'unheard',
  'too-small',
  'split',
  'no-single-cut',
  'few-values',
  'no-pair',
] as const

export const reinforcementAskedSchema = z.object({
  /** At most so many new links. */
  links: z.coerce
    .number()
    .int('Give a whole number.')
    .min(1, 'Ask for at least one link.')
    .max(REINFORCE_LINKS_MOST, `Ask for at most ${REINFORCE_LINKS_MOST} links.`)
    .default(REINFORCE_LINKS_DEFAULT),
  /** A label key: only between nodes with different values of it. */
  between: z.string().max(100).optional(),
  /** Links a node may have in the end. */
  mostDegree: z.coerce.number().int('Give a whole number.').min(1).max(100_000).optional(),
  /** Names of nodes, separated by commas or spaces: only these. */
  nodes: z.string().max(20_000).optional(),
  /** Only nodes with this label, as key=value. */
  label: z
    .string()
    .max(200)
    .regex(/^[^=]+=/, 'Write the label as key=value.')
    .optional(),
})
export type ReinforcementAsked = z.output<typeof reinforcementAskedSchema>

const end = z.object({
  name: z.string(),
  labels: z.record(z.string(), z.string()),
  side: z.enum(SIDES).nullable(),
  /** Links it has now; null where that is not known. */
  degree: z.number().nullable(),
})

export const proposalSchema = z.object({
  a: end,
  b: end,
  /** λ₂ with this link and those before it: exact, or the most it can be. */
  lambda2: z.number(),
  /** What this link adds. */
  gain: z.number(),
})
export type Proposal = z.infer<typeof proposalSchema>

export const PLANNED_STATES = ['planned', 'joined', 'withdrawn'] as const
export const SEEN_BY = ['named', 'degrees', 'operator'] as const

export const plannedLinkSchema = z.object({
  id: z.string(),
  a: z.string(),
  b: z.string(),
  state: z.enum(PLANNED_STATES),
  method: z.enum(REINFORCE_METHODS),
  /** Of the new link. */
  weight: z.number(),
  /** λ₂ when it was planned, and with this link alone: exact, or the most it can be. */
  lambda2Then: z.number(),
  forecast: z.number(),
  plannedAt: at,
  plannedBy: z.string().nullable(),
  /** The last reading without it and the first settled one with it. */
  before: z.object({ at, lambda2: z.number() }).nullable(),
  after: z.object({ at, lambda2: z.number() }).nullable(),
  joinedAt: at.nullable(),
  /** How it is known: it is named; both ends have more links than then; somebody said so. */
  seenBy: z.enum(SEEN_BY).nullable(),
})
export type PlannedLink = z.infer<typeof plannedLinkSchema>

export const reinforcementSchema = z.object({
  at,
  /** One sentence for a person, and what it rests on. */
  sentence: z.string(),
  detail: z.string(),
  /** Null where nothing can be proposed; then `nothing` says why. */
  method: z.enum(REINFORCE_METHODS).nullable(),
  nothing: z.enum(NOTHING_REASONS).nullable(),
  /** λ₂ without new links: of the named links, or the reading. */
  lambda2: z.number().nullable(),
  /** No more than this whichever links of that number are added; null where that is not known. */
  ceiling: z.number().nullable(),
  /** Weight that a new link is reckoned with. */
  weight: z.number(),
  /** Nodes it is about, and whether loose ends are left out. */
  nodes: z.number().int(),
  core: z.boolean(),
  proposals: z.array(proposalSchema),
  /** Newest first, at most 100. */
  planned: z.array(plannedLinkSchema),
})
export type Reinforcement = z.infer<typeof reinforcementSchema>

const nodeName = z.string().min(1).max(100)
export const newPlannedLinkSchema = z.object({ a: nodeName, b: nodeName })
