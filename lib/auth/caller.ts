import type { TokenScope } from '@/entities/api-token'
import type { Role } from './permissions'

export interface TeamRole {
  teamId: string
  slug: string
  name: string
  role: Role
}

export interface UserCaller {
  kind: 'user'
  userId: string
  email: string
  name: string
  /** By team name. */
  teams: readonly TeamRole[]
  /** The short name of the team they chose to act for, where several of theirs share an overlay. */
  actingFor?: string | null
}

/** Acts for its team with its creator's role there, as far as its scope goes. */
export interface TokenCaller {
  kind: 'token'
  tokenId: string
  userId: string
  email: string
  scope: TokenScope
  teams: readonly [TeamRole]
}

export interface AgentCaller {
  kind: 'agent'
  agentId: string
  overlayId: string
  teamId: string | null
  name: string
}

export type Caller =
  | { kind: 'anyone' }
  | UserCaller
  | TokenCaller
  | AgentCaller
  /** A program on the server: the admin command, a job. */
  | { kind: 'system'; name: string }

export const ANYONE: Caller = { kind: 'anyone' }

export interface Actor {
  kind: 'user' | 'token' | 'agent' | 'system'
  name: string
}

export function actorOf(caller: Caller): Actor {
  switch (caller.kind) {
    case 'user':
      return { kind: 'user', name: caller.email }
    case 'token':
      return { kind: 'token', name: `token of ${caller.email}` }
    case 'agent':
      return { kind: 'agent', name: caller.name }
    case 'system':
      return { kind: 'system', name: caller.name }
    case 'anyone':
      return { kind: 'user', name: 'not signed in' }
  }
}
