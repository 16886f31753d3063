/** What people and programs are shown of rules, their trial on history and maintenance windows. Safe to import in the browser. */
import { z } from 'zod'
import { repeatsSchema } from '@/lib/warn/repeats'
import { ruleSchema, ruleSettingsSchema, ruleTimingSchema } from '@/lib/warn/rule'
import { zoneSchema } from '@/lib/warn/zone'

const at = z.iso.datetime()

export const warningRuleSchema = ruleSchema.extend({
  id: z.string(),
  /** What it looks for, in words. */
  sentence: z.string(),
  callOrder: z.object({ id: z.string(), name: z.string() }).nullable(),
  state: z.enum(['clear', 'rising', 'raised', 'clearing']),
  /** Since when it holds, or has been raised; null while clear. */
  since: at.nullable(),
  /** Where it stands, in words. */
  said: z.string(),
  /** What it needs before it can hold, in words. */
  waitsFor: z.string().nullable(),
  evaluatedAt: at.nullable(),
})
export type WarningRuleDto = z.infer<typeof warningRuleSchema>

export const usualStateSchema = z.object({
  lambda2: z.number().nullable(),
  /** From when on it is known, where readings go on; null where it is known, or no reading has been kept yet. */
  knownFrom: at.nullable(),
})
export type UsualState = z.infer<typeof usualStateSchema>

export const warningRulesSchema = z.object({
  items: z.array(warningRuleSchema),
  usual: usualStateSchema,
  /** Those a rule can be given. */
  callOrders: z.array(z.object({ id: z.string(), name: z.string() })),
  sentence: z.string(),
})
export type WarningRules = z.infer<typeof warningRulesSchema>

/** Whole settings; what is left out stays. */
export const ruleChangeSchema = ruleSchema.partial()

export const PREVIEW_RANGES = ['24h', '7d', '30d', '1y'] as const
export type PreviewRange = (typeof PREVIEW_RANGES)[number]

export const previewAskedSchema = z.object({
  rule: ruleTimingSchema.extend({ settings: ruleSettingsSchema }),
  range: z.enum(PREVIEW_RANGES),
})
export type PreviewAsked = z.infer<typeof previewAskedSchema>

export const rulePreviewSchema = z.object({
  from: at,
  to: at,
  /** How often the rule is judged. */
  stepSeconds: z.number(),
  /** When it would have been raised and cleared; null: it still would be. */
  spans: z.array(z.object({ raisedAt: at, clearedAt: at.nullable() })),
  /** For so long there was no fresh reading. */
  unknownSeconds: z.number(),
  sentence: z.string(),
  /** What cannot be told from what is kept, a sentence each. */
  notes: z.array(z.string()),
  /** For drawing: the mean of so many seconds, with the lowest and highest step in it, and the rule's floor. */
  pointSeconds: z.number(),
  points: z.array(
    z.object({
      at,
      lambda2: z.number().nullable(),
      least: z.number().nullable(),
      most: z.number().nullable(),
      floor: z.number().nullable(),
    }),
  ),
})
export type RulePreview = z.infer<typeof rulePreviewSchema>

export const WINDOW_MOST_HOURS = 14 * 24
const label = z.object({ key: z.string().min(1).max(100), value: z.string().max(200) })

export const newWindowSchema = z
  .object({
    startsAt: z.iso.datetime({ offset: true }),
    endsAt: z.iso.datetime({ offset: true }),
    repeats: repeatsSchema.extend({ zone: zoneSchema }).nullable().default(null),
    label: label.nullable().default(null),
    reason: z.string().trim().min(1, 'Say what is done in it.').max(300),
  })
  .refine(({ startsAt, endsAt }) => Date.parse(endsAt) > Date.parse(startsAt), {
    path: ['endsAt'],
    error: 'It must end after it begins.',
  })
  .refine(
    ({ startsAt, endsAt }) => Date.parse(endsAt) - Date.parse(startsAt) <= WINDOW_MOST_HOURS * 3_600_000,
    { path: ['endsAt'], error: 'It may last at most 14 days.' },
  )
export type NewWindow = z.output<typeof newWindowSchema>

export const maintenanceWindowSchema = z.object({
  id: z.string(),
  label: label.nullable(),
  reason: z.string(),
  startsAt: at,
  endsAt: at,
  repeats: repeatsSchema.nullable(),
  createdBy: z.string().nullable(),
  endedAt: at.nullable(),
  state: z.enum(['under way', 'to come', 'over', 'ended']),
  /** The next times, the one under way first. */
  next: z.array(z.object({ startsAt: at, endsAt: at })),
})
export type MaintenanceWindowDto = z.infer<typeof maintenanceWindowSchema>
export const maintenanceWindowsSchema = z.object({ items: z.array(maintenanceWindowSchema) })
