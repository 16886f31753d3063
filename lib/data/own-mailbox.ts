import type { User } from '@/entities'

/** Everyone can be told from the first day: the channel for a new person's own address. */
export function ownMailbox(user: User, now: Date) {
  return {
    ...{ user, kind: 'email' as const, address: user.email, leastSeverity: 'note' as const },
    ...{ quiet: null, isOn: true, createdAt: now },
  }
}
