import { AgentSchema } from './agent'
import { AgentSessionSchema } from './agent-session'
import { AgentStateSchema } from './agent-state'
import { ApiTokenSchema } from './api-token'
import { AuditEntrySchema } from './audit-entry'
import { ControlSchema } from './control'
import { JoiningCodeSchema } from './joining-code'
import { MembershipSchema } from './membership'
import { OverlaySchema } from './overlay'
import { OverlayEventSchema } from './overlay-event'
import { PasswordLinkSchema } from './password-link'
import { ReadingSchema } from './reading'
import { SessionSchema } from './session'
import { TeamSchema } from './team'
import { UserSchema } from './user'

export * from './agent'
export * from './agent-session'
export * from './agent-state'
export * from './api-token'
export * from './audit-entry'
export * from './control'
export * from './joining-code'
export * from './membership'
export * from './overlay'
export * from './overlay-event'
export * from './password-link'
export * from './reading'
export * from './session'
export * from './team'
export * from './user'

export const entities = [
  AgentSchema,
  AgentSessionSchema,
  AgentStateSchema,
  ApiTokenSchema,
  AuditEntrySchema,
  ControlSchema,
  JoiningCodeSchema,
  MembershipSchema,
  OverlaySchema,
  OverlayEventSchema,
  PasswordLinkSchema,
  ReadingSchema,
  SessionSchema,
  TeamSchema,
  UserSchema,
]
