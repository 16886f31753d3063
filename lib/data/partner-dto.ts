/** What people and programs are shown of the teams that share an overlay. Safe to import in the browser: schemas only. */
import { z } from 'zod'

export const PARTNER_STATES = ['invited', 'accepted', 'ended'] as const
/** How a team takes part in an overlay. */
export const STANDINGS = ['owner', 'partner'] as const
export type Standing = (typeof STANDINGS)[number]

const at = z.iso.datetime()
const team = z.object({ slug: z.string(), name: z.string() })
const labelKey = z.string().trim().min(1).max(64)

export const INVITATION_MOST_HOURS = 24 * 30
export const newInvitationSchema = z.object({
  expiresInHours: z
    .number()
    .positive('Give more than no time.')
    .max(INVITATION_MOST_HOURS, 'Give at most 30 days of hours.')
    .default(72),
})

export const contactSchema = z
  .string()
  .trim()
  .max(200, 'Use at most 200 characters.')
  .transform((text) => text || null)

export const redeemSchema = z.object({
  code: z.string().trim().min(1, 'Write the invitation code.').max(100),
  /** Short name of the team that joins; may be left out by those who own one team only. */
  team: z.string().max(100).optional(),
  contact: contactSchema.nullable().default(null),
})
export type Redeem = z.output<typeof redeemSchema>

/** What a team says of itself to the others. What is left out stays. */
export const partShownSchema = z.object({
  contact: contactSchema.nullable().optional(),
  /** Keys of labels that the others may see of the team's nodes. */
  sharedLabels: z.array(labelKey).max(32, 'Share at most 32 labels.').optional(),
})

export const overlayTeamSchema = z.object({
  team,
  standing: z.enum(STANDINGS),
  /** The caller acts for it. */
  yours: z.boolean(),
  contact: z.string().nullable(),
  sharedLabels: z.array(z.string()),
  /** Of its agents. */
  joined: z.number().int(),
  heard: z.number().int(),
  /** Since when it shares the overlay. */
  since: at,
})
export type OverlayTeam = z.infer<typeof overlayTeamSchema>

export const invitationSchema = z.object({
  id: z.string(),
  hint: z.string(),
  state: z.enum(['open', 'used', 'expired', 'withdrawn']),
  expiresAt: at,
  invitedAt: at,
  invitedBy: z.string().nullable(),
  /** Who came of it. */
  team: team.nullable(),
})
export type Invitation = z.infer<typeof invitationSchema>
/** The code itself is shown once, on creation. */
export const createdInvitationSchema = invitationSchema.extend({ code: z.string() })
export type CreatedInvitation = z.infer<typeof createdInvitationSchema>

export const partnersSchema = z.object({
  /** The owning team first, then by when they joined. */
  teams: z.array(overlayTeamSchema),
  /** Of the owning team, newest first; for its operators and owners, else null. */
  invitations: z.array(invitationSchema).nullable(),
  /** Keys of labels that the caller's own nodes have. */
  ownLabels: z.array(z.string()),
  may: z.object({ invite: z.boolean(), change: z.boolean(), end: z.boolean() }),
})
export type Partners = z.infer<typeof partnersSchema>
