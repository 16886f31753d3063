/** What a warning rule looks for. Safe to import in the browser: schemas and defaults only. */
import { z } from 'zod'

export const RULE_KINDS = ['floor', 'few-links', 'falling', 'split', 'unheard', 'coverage', 'audit'] as const
export type RuleKind = (typeof RULE_KINDS)[number]

/** Least first. Urgent ones reach people in their quiet hours. */
export const SEVERITIES = ['note', 'warning', 'urgent'] as const
export type Severity = (typeof SEVERITIES)[number]

const percent = z.number('Give a number.').gt(0, 'Give more than 0 %.').max(100, 'Give at most 100 %.')
const whole = (least: number, most: number) =>
  z
    .number('Give a number.')
    .int('Give a whole number.')
    .min(least, `Give at least ${least}.`)
    .max(most, `Give at most ${most}.`)
const MOST_HOURS = 24 * 14
const hours = z
  .number('Give a number.')
  .positive('Give more than 0.')
  .max(MOST_HOURS, `Give at most ${MOST_HOURS} hours.`)
const MOST_DELAY_SECONDS = 86_400
const delaySeconds = z
  .number('Give a number.')
  .int('Give whole seconds.')
  .min(0, 'Give 0 or more.')
  .max(MOST_DELAY_SECONDS, 'Give at most a day.')

/** A lower limit for the core reading: a share of the usual, or a value in λ₂. */
export const floorSchema = z.discriminatedUnion('of', [
  z.object({ of: z.literal('usual'), percent }),
  z.object({ of: z.literal('value'), lambda2: z.number('Give a number.').positive('Give more than 0.') }),
])
export type Floor = z.infer<typeof floorSchema>

export const ruleSettingsSchema = z.discriminatedUnion('kind', [
  /** The core reading under the floor. */
  z.object({ kind: z.literal('floor'), floor: floorSchema }),
  /** At most so many links cross the weak cut, and its smaller side has at least this share of the nodes. */
  z.object({
    kind: z.literal('few-links'),
    links: whole(1, 1000),
    smallerSidePercent: percent,
  }),
  /** A significant fall of the means over the window, and the floor forecast within the hours with this probability. */
  z.object({
    kind: z.literal('falling'),
    means: z.enum(['minute', 'hour']),
    windowHours: hours,
    floor: floorSchema,
    withinHours: hours,
    probabilityPercent: percent,
  }),
  /** Split, or to be treated as split. */
  z.object({ kind: z.literal('split') }),
  /** At least so many agents neither heard directly nor through the overlay. */
  z.object({ kind: z.literal('unheard'), agents: whole(1, 10_000) }),
  /** Less than this share of joined agents heard, or of known links measured. */
  z.object({ kind: z.literal('coverage'), percent }),
  /** The cross-check contradicts the reading, or agents are left out because their figures do not hold. */
  z.object({ kind: z.literal('audit') }),
])
export type RuleSettings = z.infer<typeof ruleSettingsSchema>

export const ruleTimingSchema = z.object({
  /** So long the condition must hold before a person is told, seconds. */
  onDelaySeconds: delaySeconds,
  /** How far past the limit a figure must come back before the condition counts as over, per cent of the limit. */
  clearMarginPercent: z.number('Give a number.').min(0, 'Give 0 or more.').max(100, 'Give at most 100 %.'),
  /** So long it must have been over, seconds. */
  offDelaySeconds: delaySeconds,
})
export type RuleTiming = z.infer<typeof ruleTimingSchema>

export const ruleSchema = ruleTimingSchema.extend({
  settings: ruleSettingsSchema,
  severity: z.enum(SEVERITIES),
  isOn: z.boolean(),
  /** The call order that says who is told; null: it is recorded and nobody is told. */
  callOrderId: z.uuid().nullable(),
})
export type Rule = z.infer<typeof ruleSchema>
