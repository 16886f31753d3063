/**
 * What people and programs are shown: the shapes of /api/v1 and of every page.
 * Safe to import in the browser: schemas only, no data access.
 */
import { z } from 'zod'
import { DISCLOSURES } from '@/lib/method/orders'
import { PACE_NAMES } from '@/lib/method/pace'
import { LINK_KINDS, UPGRADE_STATES } from '@/lib/method/report'

import { STANDINGS } from './partner-dto'
import { ROLES } from './people-dto'

export * from './people-dto'
export * from './upkeep-dto'

export const LEVELS = ['firm', 'weak', 'split'] as const
export const TRENDS = ['steady', 'falling', 'rising'] as const
export const DATA_STATES = ['fresh', 'settling', 'unheard'] as const
export const CHECKS = ['agrees', 'unsure', 'apart'] as const
export const SIDES = ['a', 'b'] as const
export const KEPT_KINDS = ['reading', 'minute', 'hour'] as const
export const WEIGHTS = ['unit', 'delivered'] as const

const at = z.iso.datetime()
const side = z.object({ name: z.enum(SIDES), nodes: z.number().int() })

export const readingSchema = z.object({
  at,
  /** Null while withheld: see `data`. */
  lambda2: z.number().nullable(),
  low: z.number().nullable(),
  high: z.number().nullable(),
  confidence: z.number(),
  /** Without the loose ends, where there are any: level, trend, usual, λ₃ and cut are of it then. */
  core: z.object({ lambda2: z.number(), low: z.number(), high: z.number() }).nullable(),
  lambda3AtMost: z.number().nullable(),
  crossCheck: z.number().nullable(),
  /** Whether it bears the reading out; "apart": they contradict each other and have for long, rely on neither. Null: nothing to compare. */
  check: z.enum(CHECKS).nullable().optional(),
  /** While settling: how long until the reading is expected to be fresh, milliseconds. */
  settlesInMs: z.number().nullable().optional(),
  /** How long a change of links takes to show in a fresh reading, milliseconds. */
  answersInMs: z.number().nullable().optional(),
  /** Level and trend of the last good reading stay visible while data is not fresh; null before the first. */
  level: z.enum(LEVELS).nullable(),
  trend: z.enum(TRENDS).nullable(),
  data: z.enum(DATA_STATES),
  /** One sentence for a person. */
  verdict: z.string(),
  /** One or two further sentences: what the cut follows, who is unheard, why a reading is withheld. */
  detail: z.string(),
  /** True: agents unheard together make a partition likely. */
  treatAsSplit: z.boolean(),
  /** False where it is shown that no single cut is weakest; null when not known. */
  singleCut: z.boolean().nullable(),
  /** Median of at least seven days, or null. */
  usual: z.number().nullable(),
  sides: z.tuple([side, side]).nullable(),
  crossingLinks: z.number().int().nullable(),
  crossingWeight: z.number().nullable(),
  /** The next best cut that parts the nodes otherwise, by nodes on side a and side b; absent where none stands out. */
  runnerUp: z
    .object({
      sides: z.tuple([z.number().int(), z.number().int()]),
      links: z.number().int(),
      weight: z.number(),
    })
    .optional(),
  /**
   * Each piece by itself, once the overlay has come apart; or, while too few are heard, those still heard among themselves. Its λ₂ is null while it is being read, and for a node alone.
   */
  parts: z
    .array(
      z.object({
        side: z.enum(SIDES).nullable(),
        nodes: z.number().int(),
        /** A label whose values lie wholly in this piece or wholly outside it, and those in it. */
        label: z.object({ key: z.string(), values: z.array(z.string()) }).nullable(),
        lambda2: z.number().nullable(),
        low: z.number().nullable(),
        high: z.number().nullable(),
        settling: z.boolean(),
      }),
    )
    .optional(),
  looseEnds: z.array(z.object({ nodes: z.number().int(), links: z.number().int() })),
  coverage: z.object({
    linksKnown: z.number().int(),
    linksMeasured: z.number().int(),
    joined: z.number().int(),
    heard: z.number().int(),
    unheard: z.number().int(),
    /** Neighbours the overlay knows that have no agent, and agents left out because their figures did not hold. */
    withoutAgent: z.number().int().optional(),
    leftOut: z.number().int().optional(),
  }),
  /** What the links measured are, over the agents heard; "mixed" where they differ, null where none says. */
  linkKind: z.enum(['path', 'path-with-view', 'connection', 'mixed']).nullable().optional(),
  /** Where links are named: λ₂ of those, worked out exactly about once a minute, beside the reading of that moment. */
  exact: z
    .object({
      at,
      lambda2: z.number(),
      links: z.number().int(),
      /** Of the links those that only one of two heard ends names. */
      oneEnd: z.number().int(),
      /** The reading that it was compared with. */
      reading: z.number().nullable(),
      /** "apart": twice in a row they were further from each other than noise explains. */
      check: z.enum(CHECKS),
    })
    .nullable()
    .optional(),
  /** Seedings the reading rests on. */
  seedings: z.array(z.number().int()),
  /** The last good value and when, while the reading is withheld. */
  last: z.object({ at, lambda2: z.number() }).nullable(),
  /** True for history computed by simulation for the demo. */
  demo: z.boolean(),
})
export type Reading = z.infer<typeof readingSchema>

export const readingPointSchema = z.object({
  at,
  lambda2: z.number().nullable(),
  low: z.number().nullable(),
  high: z.number().nullable(),
  level: z.enum(LEVELS).nullable(),
  data: z.enum(DATA_STATES),
  demo: z.boolean(),
  /** The coarsest of what it is made from: single readings, or what is kept of a minute or an hour. */
  kept: z.enum(KEPT_KINDS).optional(),
  /** Of minutes and hours: how many readings, and how many of them fresh. */
  readings: z.number().int().optional(),
  fresh: z.number().int().optional(),
  /** The lowest and highest, of fresh readings where there are any; and the least covered moment. */
  least: z.number().nullable().optional(),
  most: z.number().nullable().optional(),
  heard: z.number().int().nullable().optional(),
  joined: z.number().int().nullable().optional(),
  /** The fewest in the step. */
  crossingLinks: z.number().int().nullable().optional(),
})
export type ReadingPoint = z.infer<typeof readingPointSchema>
export const readingsSchema = z.object({
  items: z.array(readingPointSchema),
  stepSeconds: z.number(),
  kept: z.enum(KEPT_KINDS).optional(),
})

export const NODE_STATES = ['heard', 'unheard', 'detached', 'left', 'revoked', 'left-out'] as const
export const nodeSchema = z.object({
  name: z.string(),
  labels: z.record(z.string(), z.string()),
  side: z.enum(SIDES).nullable(),
  /** Fiedler value in units where the mean square over nodes is 1; null where not disclosed or not known. */
  value: z.number().nullable(),
  degree: z.number().nullable(),
  weightedDegree: z.number().nullable(),
  heardAt: at.nullable(),
  version: z.string().nullable(),
  state: z.enum(NODE_STATES),
  /** Another team's: the name is what the caller's team calls it, and its agent's own affairs are left out. */
  partner: z.boolean().optional(),
  /** How the overlay knows the node, where its agent says so. */
  node: z.string().nullable().optional(),
  joinedAt: at.optional(),
  /** When it left, was revoked or left out. */
  endedAt: at.nullable().optional(),
  /** Why it was left out, in a sentence. */
  leftOutBecause: z.string().nullable().optional(),
  /** Its reports come through neighbours. */
  relayed: z.boolean().optional(),
  /** How the agent fares, from its last report; null before version 2 and before the first report. */
  health: z
    .object({
      uptimeSeconds: z.number(),
      clockSkewMs: z.number(),
      reportTookMs: z.number().nullable(),
      reportsFailed: z.number(),
      ticksLateShare: z.number().nullable(),
      lastError: z.string().nullable(),
      linkKind: z.enum(LINK_KINDS),
      linksKnown: z.number(),
      withoutAgent: z.number(),
      source: z.object({ kind: z.string(), error: z.string().nullable() }).nullable(),
      weakestWeight: z.number().nullable(),
      meanWeight: z.number().nullable(),
      refusedNeighbours: z.number(),
      /** Walkers by the audit of the last report: 0 where the books balance. */
      auditImbalance: z.number().nullable(),
      upgrade: z
        .object({ version: z.string(), state: z.enum(UPGRADE_STATES), error: z.string().nullable() })
        .nullable(),
    })
    .nullable()
    .optional(),
})
export type OverlayNode = z.infer<typeof nodeSchema>
export const nodesSchema = z.object({
  items: z.array(nodeSchema),
  next: z.string().nullable(),
  /** Of a past moment: when the snapshot was taken. */
  at: at.optional(),
})

/** A disclosed link; a and b are node names, a before b. */
export const linkSchema = z.object({
  a: z.string(),
  b: z.string(),
  weight: z.number(),
  share: z.number().nullable(),
  crossing: z.boolean(),
  /** "lost" links were named at the last good reading and are not heard any more. */
  state: z.enum(['live', 'lost']),
  heardAt: at,
})
export type OverlayLink = z.infer<typeof linkSchema>
export const linksSchema = z.object({ items: z.array(linkSchema), next: z.string().nullable() })

export const cutSchema = z.object({
  at,
  sides: z.tuple([side, side]).nullable(),
  /** Why no sides are given, where they are not. */
  withheld: z.string().nullable(),
  crossingLinks: z.number().int().nullable(),
  crossingWeight: z.number().nullable(),
  /** Crossing links as disclosure allows. */
  links: z.array(linkSchema),
  /** The label key the sides follow exactly, if any, with the values on either side. */
  follows: z.object({ key: z.string(), a: z.array(z.string()), b: z.array(z.string()) }).nullable(),
})
export type Cut = z.infer<typeof cutSchema>

export const overlaySchema = z.object({
  slug: z.string(),
  name: z.string(),
  team: z.object({ slug: z.string(), name: z.string() }),
  pace: z.enum(PACE_NAMES),
  disclosure: z.enum(DISCLOSURES),
  weights: z.enum(WEIGHTS),
  createdAt: at,
  demo: z.boolean(),
  contact: z.string().nullable(),
  runbookUrl: z.string().nullable(),
  /** Agents unheard for so long are retired by themselves; null for never. */
  retireAfterHours: z.number().int().nullable().optional(),
  /** The caller's role in the team as which they see the overlay. */
  role: z.enum(ROLES),
  /** How that team takes part, and which one it is; null for programs of the server. */
  standing: z.enum(STANDINGS).optional(),
  as: z.object({ slug: z.string(), name: z.string() }).nullable().optional(),
  /** The caller's own among the teams that share it: for which of them they act can be chosen. */
  seats: z.array(z.object({ slug: z.string(), name: z.string(), role: z.enum(ROLES) })).optional(),
  /** Other teams take part. */
  shared: z.boolean().optional(),
  joined: z.number().int(),
})
export type Overlay = z.infer<typeof overlaySchema>

const slug = z
  .string()
  .regex(
    /^[a-z0-9](?:[a-z0-9-]{0,38}[a-z0-9])?$/,
    'Use 1 to 40 lower-case letters, digits and inner hyphens.',
  )

export const newOverlaySchema = z.object({
  name: z.string().trim().min(1, 'Give the overlay a name.').max(80),
  slug,
  pace: z.enum(PACE_NAMES).default('steady'),
  disclosure: z.enum(DISCLOSURES).default('sealed'),
  weights: z.enum(WEIGHTS).default('delivered'),
  contact: z.string().trim().max(200).nullable().default(null),
  /** Shown as a link, so nothing but web addresses. */
  runbookUrl: z
    .url({ protocol: /^https?$/, error: 'Give a whole address: https://…' })
    .nullable()
    .default(null),
  /** Slug of the owning team; may be left out when the caller belongs to one team only. */
  team: z.string().optional(),
})
export type NewOverlay = z.input<typeof newOverlaySchema>

export const newJoiningCodeSchema = z.object({
  uses: z.number().int().min(1).max(10_000).default(1),
  expiresInHours: z
    .number()
    .positive()
    .max(24 * 90)
    .default(24),
})

/** The code itself is shown once, on creation. */
export const joiningCodeSchema = z.object({
  id: z.string(),
  hint: z.string(),
  uses: z.number().int(),
  used: z.number().int(),
  expiresAt: at,
  createdAt: at,
  createdBy: z.string().nullable(),
  state: z.enum(['open', 'used', 'expired', 'revoked']),
})
export type JoiningCode = z.infer<typeof joiningCodeSchema>
export const createdJoiningCodeSchema = joiningCodeSchema.extend({ code: z.string() })
export type CreatedJoiningCode = z.infer<typeof createdJoiningCodeSchema>

export const EVENT_KINDS = [
  'agent-joined',
  'agent-left',
  'agent-revoked',
  'agent-unheard',
  'agent-heard',
  'level-changed',
  'link-lost',
  'link-found',
  'link-weakened',
  'link-recovered',
  'withheld',
  'resumed',
  'agent-left-out',
  'agent-readmitted',
  'agent-cloned',
  'key-rotated',
  'upgrade-offered',
  'upgrade-halted',
  'collector-away',
  'incident-raised',
  'incident-cleared',
  'warnings-away',
  'rehearsal-planned',
  'rehearsal-started',
  'rehearsal-ended',
  'partner-joined',
  'partner-ended',
] as const
export const eventSchema = z.object({
  id: z.string(),
  at,
  kind: z.enum(EVENT_KINDS),
  /** One line for a person. */
  text: z.string(),
})
export type OverlayEvent = z.infer<typeof eventSchema>
export const eventsSchema = z.object({ items: z.array(eventSchema) })

/** RFC 9457 problem details, with what to do next. */
export const problemSchema = z.object({
  type: z.string(),
  title: z.string(),
  status: z.number().int(),
  detail: z.string(),
  code: z.string(),
  retry: z.boolean(),
  errors: z.array(z.object({ path: z.string(), message: z.string() })).optional(),
})
export type Problem = z.infer<typeof problemSchema>
