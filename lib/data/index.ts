/** What pages, actions and routes may ask for. Every function checks the caller and returns DTOs. */
import 'server-only'

export { AUDIT_PAGE_SIZE, type AuditFilter, type AuditPage, auditFilterSchema, listAudit } from './audit'
export { createJoiningCode, listJoiningCodes, revokeJoiningCode } from './joining-codes'
export {
  addMember,
  changeRole,
  listMembers,
  newMemberLink,
  removeMember,
  type SetPasswordLink,
  type TeamMembers,
} from './members'
export { createOverlay, getOverlay, listOverlays, openOverlay } from './overlays'
export { readPasswordLink, setPassword } from './password-links'
export { countAttempt, signIn, signOut } from './sign-in'
export { listTeams } from './teams'
export { firstRun, isFirstRun } from './users'
