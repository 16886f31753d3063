import { AgentSchema } from './agent'
import { AgentReleaseSchema } from './agent-release'
import { AgentSessionSchema } from './agent-session'
import { AgentStateSchema } from './agent-state'
import { ApiTokenSchema } from './api-token'
import { AuditEntrySchema } from './audit-entry'
import { CallOrderSchema } from './call-order'
import { ChannelSchema } from './channel'
import { ControlSchema } from './control'
import { DeliveryAttemptSchema } from './delivery-attempt'
import { IncidentSchema } from './incident'
import { IncidentEntrySchema } from './incident-entry'
import { IncidentFileSchema } from './incident-file'
import { JoiningCodeSchema } from './joining-code'
import { MaintenanceWindowSchema } from './maintenance-window'
import { MaskedVectorSchema } from './masked-vector'
import { MembershipSchema } from './membership'
import { OutboxMessageSchema } from './outbox-message'
import { OverlaySchema } from './overlay'
import { OverlayEventSchema } from './overlay-event'
import { OverlayKeySchema } from './overlay-key'
import { OverlayKeyRingSchema } from './overlay-key-ring'
import { OverlayPartnerSchema } from './overlay-partner'
import { PasswordLinkSchema } from './password-link'
import { PlannedLinkSchema } from './planned-link'
import { ReadingSchema } from './reading'
import { RehearsalSchema } from './rehearsal'
import { SessionSchema } from './session'
import { ShutAgentSchema } from './shut-agent'
import { StandInSchema } from './stand-in'
import { TeamSchema } from './team'
import { TurnSchema } from './turn'
import { UpgradeOfferSchema } from './upgrade-offer'
import { UserSchema } from './user'
import { WarningRuleSchema } from './warning-rule'
import { WebhookSchema } from './webhook'

export * from './agent'
export * from './agent-release'
export * from './agent-session'
export * from './agent-state'
export * from './api-token'
export * from './audit-entry'
export * from './call-order'
export * from './channel'
export * from './control'
export * from './delivery-attempt'
export * from './incident'
export * from './incident-entry'
export * from './incident-file'
export * from './joining-code'
export * from './maintenance-window'
export * from './masked-vector'
export * from './membership'
export * from './outbox-message'
export * from './overlay'
export * from './overlay-event'
export * from './overlay-key'
export * from './overlay-key-ring'
export * from './overlay-partner'
export * from './password-link'
export * from './planned-link'
export * from './reading'
export * from './rehearsal'
export * from './session'
export * from './shut-agent'
export * from './stand-in'
export * from './team'
export * from './turn'
export * from './upgrade-offer'
export * from './user'
export * from './warning-rule'
export * from './webhook'

export const entities = [
  AgentSchema,
  AgentReleaseSchema,
  AgentSessionSchema,
  AgentStateSchema,
  ApiTokenSchema,
  AuditEntrySchema,
  CallOrderSchema,
  ChannelSchema,
  ControlSchema,
  DeliveryAttemptSchema,
  IncidentSchema,
  IncidentEntrySchema,
  IncidentFileSchema,
  JoiningCodeSchema,
  MaintenanceWindowSchema,
  MaskedVectorSchema,
  MembershipSchema,
  OutboxMessageSchema,
  OverlaySchema,
  OverlayEventSchema,
  OverlayKeySchema,
  OverlayKeyRingSchema,
  OverlayPartnerSchema,
  PasswordLinkSchema,
  PlannedLinkSchema,
  ReadingSchema,
  RehearsalSchema,
  SessionSchema,
  ShutAgentSchema,
  StandInSchema,
  TeamSchema,
  TurnSchema,
  UpgradeOfferSchema,
  UserSchema,
  WarningRuleSchema,
  WebhookSchema,
]
