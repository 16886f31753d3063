/** What pages, actions and routes may ask for. Every function checks the caller and returns DTOs. */
import 'server-only'

export { readmitAgent, retireAgent, revokeAgent } from './agents'
export { AUDIT_PAGE_SIZE, type AuditFilter, type AuditPage, auditFilterSchema, listAudit } from './audit'
export { changeCallOrder, createCallOrder, removeCallOrder } from './call-orders'
export { addChannel, changeChannel, listChannels, removeChannel } from './channels'
export { listDeliveries, retryDelivery } from './deliveries'
export { createInvitation, joinAsPartner, withdrawInvitation } from './invitations'
export { createJoiningCode, listJoiningCodes, revokeJoiningCode } from './joining-codes'
export { listKeptMessages } from './kept-messages'
export {
  addMember,
  changeRole,
  listMembers,
  newMemberLink,
  removeMember,
  type SetPasswordLink,
  type TeamMembers,
} from './members'
export { createOverlay, getOverlay, listOverlays, openOverlay, setRetireAfter } from './overlays'
export { endPartnership } from './partner-end'
export { changePart, listPartners } from './partners'
export { readPasswordLink, setPassword } from './password-links'
export { cancelRehearsal, createRehearsal, getRehearsal, listRehearsals } from './rehearsals'
export {
  getReinforcement,
  markJoined,
  planLink,
  withdrawLink,
} from './reinforcement'
export { testChannel, testWebhook } from './send-test'
export { countAttempt, signIn, signOut } from './sign-in'
export { getSigningKey, rotateSigningKey } from './signing-key'
export { listTeams } from './teams'
export { getTelling } from './telling'
export { addStandIn, changeTurn, createTurn, removeStandIn, removeTurn } from './turns'
export { getUpgrades, haltUpgrade, offerUpgrade } from './upgrades'
export { firstRun, isFirstRun } from './users'
export { changeRule, createRule, listRules, removeRule } from './warning-rules'
export { addWebhook, enableWebhook, listWebhooks, removeWebhook, rotateWebhook } from './webhooks'
export { createWindow, endWindow } from './windows'
