import { z } from 'zod'
import { deliveriesSchema, deliverySchema } from '@/lib/data/delivery-dto'
import {
  createdJoiningCodeSchema,
  cutSchema,
  eventSchema,
  eventsSchema,
  joiningCodeSchema,
  linkSchema,
  linksSchema,
  nodeSchema,
  nodesSchema,
  overlaySchema,
  problemSchema,
  readingPointSchema,
  readingSchema,
  readingsSchema,
  signingKeySchema,
  upgradeOfferDtoSchema,
  upgradesSchema,
} from '@/lib/data/dto'
import { createdInvitationSchema, invitationSchema, partnersSchema } from '@/lib/data/partner-dto'
import { rehearsalSchema, rehearsalsSchema } from '@/lib/data/rehearsal-dto'
import { plannedLinkSchema, reinforcementSchema } from '@/lib/data/reinforcement-dto'
import {
  maintenanceWindowSchema,
  maintenanceWindowsSchema,
  rulePreviewSchema,
  warningRuleSchema,
  warningRulesSchema,
} from '@/lib/data/rules-dto'
import { incidentFileSchema, incidentSchema, incidentsSchema, incidentWholeSchema } from '@/lib/data/warn-dto'
import { linkStorySchema, momentsSchema, nodeStorySchema, weakPlaceSchema } from '@/lib/data/weak-dto'

/** What answers are made of, by the name each has in the description. */
export const ANSWERS = {
  Problem: problemSchema,
  Overlay: overlaySchema,
  Overlays: z.object({ items: z.array(overlaySchema), next: z.null() }),
  Reading: readingSchema,
  ReadingPoint: readingPointSchema,
  Readings: readingsSchema,
  Cut: cutSchema,
  Node: nodeSchema,
  Nodes: nodesSchema,
  Link: linkSchema,
  Links: linksSchema,
  Event: eventSchema,
  Events: eventsSchema,
  JoiningCode: joiningCodeSchema,
  JoiningCodes: z.object({ items: z.array(joiningCodeSchema), next: z.null() }),
  CreatedJoiningCode: createdJoiningCodeSchema,
  SigningKey: signingKeySchema,
  UpgradeOffer: upgradeOfferDtoSchema,
  Upgrades: upgradesSchema,
  Partners: partnersSchema,
  Invitation: invitationSchema,
  CreatedInvitation: createdInvitationSchema,
  /** A team's part that has ended, and how many agents of it left. */
  PartnerEnded: z.object({
    team: z.object({ slug: z.string(), name: z.string() }),
    agents: z.number().int(),
  }),
  JoinedOverlay: z.object({ slug: z.string(), name: z.string() }),
  Rehearsal: rehearsalSchema,
  Rehearsals: rehearsalsSchema,
  WeakPlace: weakPlaceSchema,
  Moments: momentsSchema,
  NodeStory: nodeStorySchema,
  LinkStory: linkStorySchema,
  Reinforcement: reinforcementSchema,
  PlannedLink: plannedLinkSchema,
  WarningRule: warningRuleSchema,
  WarningRules: warningRulesSchema,
  RulePreview: rulePreviewSchema,
  MaintenanceWindow: maintenanceWindowSchema,
  MaintenanceWindows: maintenanceWindowsSchema,
  Incident: incidentSchema,
  Incidents: incidentsSchema,
  IncidentWhole: incidentWholeSchema,
  IncidentFile: incidentFileSchema,
  Delivery: deliverySchema,
  Deliveries: deliveriesSchema,
  Id: z.object({ id: z.string() }),
} as const satisfies Record<string, z.ZodType>
export type AnswerName = keyof typeof ANSWERS
