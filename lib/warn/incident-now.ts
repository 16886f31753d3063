import type { CallStep, Told } from './call-order'
import type { Severity } from './rule'

/** An incident that is not resolved, as rules and telling see it. */
export interface IncidentNow {
  id: string
  severity: Severity
  sentence: string
  raisedAtMs: number
  clearedAtMs: number | null
  isHeld: boolean
  mutedUntilMs: number | null
  inMaintenance: boolean
  /** What is raised in it now. */
  ruleIds: readonly string[]
  /** By call order. */
  told: Readonly<Record<string, Told>>
}

export interface CallOrderNow {
  id: string
  name: string
  /** Whom each step reaches at this moment: turns and roles are people here. */
  steps: readonly (Pick<CallStep, 'afterMinutes'> & { to: readonly Recipient[] })[]
}

export type Recipient = { userId: string } | { webhookId: string }

export const sameRecipient = (a: Recipient, b: Recipient): boolean =>
  'userId' in a ? 'userId' in b && a.userId === b.userId : 'webhookId' in b && a.webhookId === b.webhookId
