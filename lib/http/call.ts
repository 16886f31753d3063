import type { Caller } from '@/lib/auth/caller'
import { decide } from '@/lib/auth/decide'
import { type ActionName, permissionOf } from '@/lib/auth/permissions'
import type { EntityManager } from '@/lib/db'
import { AppError } from './app-error'
import type { RequestFacts } from './request-facts'

/** What the audit log will say of a call. */
export interface AuditNote {
  teamId?: string | null
  /** What it is done to, in words. */
  subject?: string
  data?: Record<string, unknown>
  /** Who acts, where the caller could not be known beforehand: someone who signs in. */
  actor?: string
  /** The throttle counted the attempt, so a refusal may be entered though nobody knows who asks. */
  counted?: boolean
  /** Nothing was changed that is worth an entry. */
  omit?: boolean
}

/** `origin` is scheme and host for links to this server. */
export type CallRequest = Pick<RequestFacts, 'origin' | 'secure' | 'address' | 'sessionId'>

/** One request, or one run of a program, on its way through lib/data. */
export interface Call {
  em: EntityManager
  caller: Caller
  now: Date
  request: CallRequest
  /** Adds to what the audit log will say. */
  note(note: AuditNote): void
  /** The actions that lib/data has checked in this call. */
  readonly checked: Set<ActionName>
}

/** Every function of lib/data begins with this. Throws unless the table allows the action to the caller. */
export function authorise(call: Call, action: ActionName, teamId: string | null = null): void {
  if (teamId !== null) call.note({ teamId })
  assertAllowed(action, call.caller, teamId)
  call.checked.add(action)
}

export function assertAllowed(action: ActionName, caller: Caller, teamId: string | null): void {
  const permission = permissionOf(action)
  switch (decide(permission, caller, teamId)) {
    case 'allowed':
      return
    case 'not-signed-in':
      throw new AppError('not-signed-in', 'Sign in, or send a token as "Authorization: Bearer …".')
    case 'token-refused':
      throw new AppError(
        'token-refused',
        permission.tokenScope === null
          ? 'This cannot be done with a token. Sign in and do it on the page.'
          : `This needs a token of scope "${permission.tokenScope}".`,
      )
    case 'forbidden':
      throw new AppError(
        'forbidden',
        permission.role === null
          ? 'This is not open to you.'
          : `This needs the role ${permission.role}. Ask an owner of the team.`,
      )
    case 'not-found':
      throw new AppError('not-found', 'There is nothing here that you may see. Check the address.')
  }
}
