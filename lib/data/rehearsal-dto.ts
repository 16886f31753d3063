/** What people and programs are shown of rehearsals. Safe to import in the browser. */
import { z } from 'zod'
import { LEVELS, SIDES } from './dto'

const at = z.iso.datetime()
const nodeName = z.string().min(1).max(100)
const labelText = z.string().min(1).max(100)

export const REHEARSAL_STATES = ['waiting', 'running', 'done', 'cancelled', 'failed'] as const
/** holds: at or over the floor, or nobody has set one; below-floor; splits: what remains falls apart. */
export const REHEARSAL_ANSWERS = ['holds', 'below-floor', 'splits'] as const
export const MAX_REHEARSED = 2_000

/** What is taken away in rehearsal; real traffic is untouched. */
export const excludedSchema = z.object({
  nodes: z.array(nodeName).max(MAX_REHEARSED).default([]),
  /** Where disclosure and policy allow naming links. */
  links: z
    .array(z.tuple([nodeName, nodeName]))
    .max(MAX_REHEARSED)
    .default([]),
  /** All nodes with this label. */
  labels: z
    .array(z.object({ key: labelText, value: labelText }))
    .max(32)
    .default([]),
  /** All links between nodes with one value of a label and nodes with another, where policy allows. */
  between: z
    .array(z.object({ key: labelText, a: labelText, b: labelText }))
    .max(32)
    .default([]),
})
export type Excluded = z.infer<typeof excludedSchema>

export const newRehearsalSchema = z.object({
  exclude: excludedSchema,
  note: z.string().trim().max(300).nullable().default(null),
  /** Number of an incident of the same team and overlay to keep it on. */
  incident: z.number().int().positive().nullable().default(null),
  /** When to begin; at once if left out. */
  startsAt: at.nullable().default(null),
})
export type NewRehearsal = z.input<typeof newRehearsalSchema>

const figures = z.object({ lambda2: z.number(), low: z.number(), high: z.number() })
const side = z.object({ name: z.enum(SIDES), nodes: z.number().int() })

export const rehearsalSchema = z.object({
  id: z.string(),
  state: z.enum(REHEARSAL_STATES),
  /** 0 to 1. */
  progress: z.number(),
  /** Until the verdict is expected, milliseconds; null when not running or not known. */
  endsInMs: z.number().nullable(),
  askedAt: at,
  startsAt: at.nullable(),
  startedAt: at.nullable(),
  endedAt: at.nullable(),
  by: z.string().nullable(),
  note: z.string().nullable(),
  incident: z.number().int().nullable(),
  exclude: excludedSchema,
  /** Nodes taken away and nodes that remain, once begun. */
  taken: z.number().int().nullable(),
  remain: z.number().int().nullable(),
  /** As it would be, and as it was beside it; while running, what is known so far. */
  reading: figures.nullable(),
  level: z.enum(LEVELS).nullable(),
  sides: z.tuple([side, side]).nullable(),
  crossingLinks: z.number().int().nullable(),
  live: figures.nullable(),
  /** The lower limit it is held against, and where that comes from. */
  floor: z.object({ lambda2: z.number(), because: z.string() }).nullable(),
  answer: z.enum(REHEARSAL_ANSWERS).nullable(),
  /** One sentence for a person; why it failed, where it did. */
  verdict: z.string().nullable(),
  /** Where not all can go at once: an order in which they can, each wave rehearsed. Null where not needed or none was found. */
  waves: z
    .array(z.object({ nodes: z.array(nodeName), lambda2: z.number(), low: z.number(), high: z.number() }))
    .nullable(),
})
export type RehearsalDto = z.infer<typeof rehearsalSchema>
/** What the walkers have said of it so far. */
export type RehearsalResult = Pick<
  RehearsalDto,
  'reading' | 'level' | 'sides' | 'crossingLinks' | 'live' | 'floor' | 'answer' | 'waves'
>
/** How far the search for an order in waves has come: nodes by name. */
export interface RehearsalPlan {
  /** Waves that hold, in their order, and what is still to be placed. */
  held: NonNullable<RehearsalDto['waves']>
  left: string[]
  /** The wave that is being rehearsed now. */
  tried: string[]
  tries: number
}
export const rehearsalsSchema = z.object({
  items: z.array(rehearsalSchema),
  /** How many may run at once, and whether the caller may start one. */
  most: z.number().int(),
  mayStart: z.boolean(),
})
