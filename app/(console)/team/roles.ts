import type { Role } from '@/lib/auth/permissions'

export const ROLE_WORDS: Record<Role, { label: string; meaning: string }> = {
  owner: {
    label: 'Owner',
    meaning: 'Everything an operator may, and adds, changes and removes people and replaces the signing key.',
  },
  operator: {
    label: 'Operator',
    meaning:
      'Creates overlays and joining codes, retires and revokes agents, offers upgrades, and reads the audit log.',
  },
  viewer: { label: 'Viewer', meaning: 'Sees readings, nodes and who is in the team; changes nothing.' },
}
