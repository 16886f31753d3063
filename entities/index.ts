import { AgentSchema } from './agent'
import { AgentReleaseSchema } from './agent-release'
import { AgentSessionSchema } from './agent-session'
import { AgentStateSchema } from './agent-state'
import { ApiTokenSchema } from './api-token'
import { AuditEntrySchema } from './audit-entry'
import { ControlSchema } from './control'
import { JoiningCodeSchema } from './joining-code'
import { MembershipSchema } from './membership'
import { OverlaySchema } from './overlay'
import { OverlayEventSchema } from './overlay-event'
import { OverlayKeySchema } from './overlay-key'
import { OverlayKeyRingSchema } from './overlay-key-ring'
import { PasswordLinkSchema } from './password-link'
import { ReadingSchema } from './reading'
import { SessionSchema } from './session'
import { ShutAgentSchema } from './shut-agent'
import { TeamSchema } from './team'
import { UpgradeOfferSchema } from './upgrade-offer'
import { UserSchema } from './user'

export * from './agent'
export * from './agent-release'
export * from './agent-session'
export * from './agent-state'
export * from './api-token'
export * from './audit-entry'
export * from './control'
export * from './joining-code'
export * from './membership'
export * from './overlay'
export * from './overlay-event'
export * from './overlay-key'
export * from './overlay-key-ring'
export * from './password-link'
export * from './reading'
export * from './session'
export * from './shut-agent'
export * from './team'
export * from './upgrade-offer'
export * from './user'

export const entities = [
  AgentSchema,
  AgentReleaseSchema,
  AgentSessionSchema,
  AgentStateSchema,
  ApiTokenSchema,
  AuditEntrySchema,
  ControlSchema,
  JoiningCodeSchema,
  MembershipSchema,
  OverlaySchema,
  OverlayEventSchema,
  OverlayKeySchema,
  OverlayKeyRingSchema,
  PasswordLinkSchema,
  ReadingSchema,
  SessionSchema,
  ShutAgentSchema,
  TeamSchema,
  UpgradeOfferSchema,
  UserSchema,
]
