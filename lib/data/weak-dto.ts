/** What people and programs are shown of the weak place, its links and nodes. Safe to import in the browser. */
import { z } from 'zod'
import type { RANGES } from '@/lib/face/range'
import { LEFT_OUT_REASONS } from '@/lib/method/labels'
import { DISCLOSURES } from '@/lib/method/orders'
import { eventSchema, LEVELS, linkSchema, nodeSchema, readingSchema, SIDES } from './dto'
import { incidentSchema } from './warn-dto'

const at = z.iso.datetime()

export const LASTS = [
  '15min',
  '3h',
  '24h',
  '7d',
  '30d',
  '1y',
] as const satisfies readonly (typeof RANGES)[number]['id'][]
export type Last = (typeof LASTS)[number]
export const lastSchema = z.enum(LASTS, 'Write 15min, 3h, 24h, 7d, 30d or 1y.')

/** Since when agents have named a link without a break; `atLeast`: it may have been before. */
const since = z.object({ at, atLeast: z.boolean() }).nullable()
/** Milliseconds since 1970, weight, share of λ₂; oldest first, while the link crossed the cut. */
const linkCourse = z.array(z.tuple([z.number(), z.number(), z.number().nullable()]))
export type LinkCourse = z.infer<typeof linkCourse>

export const weakLinkSchema = linkSchema.extend({
  since,
  /** λ₂ is at most this once it is gone, never the new value; null where its share or its ends are not known now. */
  without: z.number().nullable(),
  course: linkCourse,
})
export type WeakLink = z.infer<typeof weakLinkSchema>

export const NO_SIDES = ['nothing-joined', 'not-counted', 'unheard', 'shared'] as const

const weakSideSchema = z.object({
  name: z.enum(SIDES),
  nodes: z.number().int(),
  /** Sum of its nodes' weighted degrees; null where not all of them are known. */
  volume: z.number().nullable(),
})

export const weakPlaceSchema = z.object({
  at,
  /** False for a past moment. */
  isNow: z.boolean(),
  disclosure: z.enum(DISCLOSURES),
  reading: readingSchema,
  /** Why there are no sides, and what to do; null where there are. */
  withheld: z.object({ because: z.enum(NO_SIDES), sentence: z.string(), next: z.string() }).nullable(),
  /** What must be known of the sides before they are relied on. */
  remark: z.string().nullable(),
  sides: z.tuple([weakSideSchema, weakSideSchema]).nullable(),
  crossing: z.object({ links: z.number().int(), weight: z.number() }).nullable(),
  /** Of the cut as counted, by the combinatorial Laplacian. */
  figures: z
    .object({
      /** Crossing weight per node of the smaller side; null where nothing is on one of them. */
      expansion: z.number().nullable(),
      /** Crossing weight per weighted degree of the side with less of it. */
      conductance: z.number().nullable(),
      /** λ₂ can be no more than this while the cut is as it is. */
      lambda2AtMost: z.number().nullable(),
      /** Cheeger: no cut has a smaller expansion than `least`, and some cut has at most `most`. */
      least: z.number().nullable(),
      most: z.number().nullable(),
    })
    .nullable(),
  /** Crossing links as disclosure allows. */
  links: z.array(weakLinkSchema),
  follows: z.object({
    /** Nodes on a side. */
    nodes: z.number().int(),
    labels: z.array(
      z.object({
        key: z.string(),
        values: z.number().int(),
        labelled: z.number().int(),
        unlabelled: z.number().int(),
        /** Adjusted mutual information, normaliser min. */
        adjusted: z.number(),
        p: z.number(),
        permutations: z.number().int(),
        exactly: z.object({ a: z.array(z.string()), b: z.array(z.string()) }).nullable(),
      }),
    ),
    leftOut: z.array(
      z.object({
        key: z.string(),
        values: z.number().int(),
        labelled: z.number().int(),
        because: z.enum(LEFT_OUT_REASONS),
      }),
    ),
  }),
  /** The next best cut that parts the nodes otherwise: nodes on side a and b of it. */
  runnerUp: z
    .object({
      sides: z.tuple([z.number().int(), z.number().int()]),
      links: z.number().int(),
      weight: z.number(),
      expansion: z.number(),
    })
    .nullable(),
})
export type WeakPlace = z.infer<typeof weakPlaceSchema>

export const momentsSchema = z.object({
  items: z.array(
    z.object({
      at,
      lambda2: z.number().nullable(),
      level: z.enum(LEVELS).nullable(),
      crossingLinks: z.number().int().nullable(),
    }),
  ),
})
export type KeptMoment = z.infer<typeof momentsSchema>['items'][number]

const mention = incidentSchema.extend({
  /** The lines of its timeline that name it, newest first. */
  lines: z.array(z.object({ at, text: z.string() })),
})
export type Mention = z.infer<typeof mention>

export const nodeStorySchema = z.object({
  node: nodeSchema,
  disclosure: z.enum(DISCLOSURES),
  /** Its links as agents name them, with the nodes at the other end. */
  links: z.array(linkSchema),
  /** Measured links that are not named. */
  unnamed: z.number().int(),
  course: z.array(
    z.object({
      at,
      value: z.number().nullable(),
      side: z.enum(SIDES).nullable(),
      degree: z.number().nullable(),
      weightedDegree: z.number().nullable(),
      state: z.enum(['heard', 'unheard', 'detached']),
    }),
  ),
  incidents: z.array(mention),
})
export type NodeStory = z.infer<typeof nodeStorySchema>

export const linkStorySchema = z.object({
  a: nodeSchema,
  b: nodeSchema,
  disclosure: z.enum(DISCLOSURES),
  /** As it is named now; null where no agent names it. */
  link: linkSchema.nullable(),
  since,
  without: z.number().nullable(),
  course: linkCourse,
  /** When it was lost and found, newest first. */
  events: z.array(eventSchema),
  incidents: z.array(mention),
})
export type LinkStory = z.infer<typeof linkStorySchema>
