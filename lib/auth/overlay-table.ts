/** What each role of each team that shares an overlay sees and may do: the table of docs/partners.md. */
import type { Caller } from './caller'
import { actingFor } from './overlay-rights'
import { type ActionName, permissionOf, type Role } from './permissions'

export interface OverlayRow {
  what: string
  action: ActionName
  /** Of what there is, as the team that owns the overlay; and as a partner, where that is not the same. */
  owner: string
  partner?: string
}

const NAMES = 'own by name, others by made-up names'

export const OVERLAY_ROWS: readonly OverlayRow[] = [
  {
    what: 'The overlay: name, pace, disclosure, contact',
    action: 'overlay.read',
    owner: 'all',
    partner: 'all but the runbook',
  },
  {
    what: 'Reading, history, sides by counts, crossing links by count',
    action: 'reading.read',
    owner: 'all; labels that every team shows',
  },
  { what: 'Nodes: state, side, value, links by count', action: 'node.list', owner: NAMES },
  {
    what: 'Links and crossing links, as far as disclosure names them',
    action: 'link.list',
    owner: NAMES,
  },
  { what: 'Nodes and links as a file', action: 'export.read', owner: NAMES },
  { what: 'New links that would help', action: 'reinforcement.read', owner: NAMES },
  {
    what: 'New links: plan, mark as made, withdraw',
    action: 'reinforcement.plan',
    owner: 'any',
    partner: 'with own nodes',
  },
  { what: 'What happened, and the event stream', action: 'event.read', owner: NAMES },
  { what: 'Joining codes: look', action: 'joining-code.list', owner: 'own' },
  { what: 'Joining codes: make', action: 'joining-code.create', owner: 'own' },
  { what: 'Joining codes: revoke', action: 'joining-code.revoke', owner: 'own' },
  { what: 'Agents: revoke', action: 'agent.revoke', owner: 'any', partner: 'own' },
  { what: 'Agents: retire', action: 'agent.retire', owner: 'any', partner: 'own' },
  { what: 'Agents: readmit', action: 'agent.readmit', owner: 'any', partner: 'own' },
  { what: 'Versions and upgrades: look', action: 'upgrade.read', owner: 'own' },
  { what: 'Upgrades: offer', action: 'upgrade.offer', owner: 'to own agents' },
  { what: 'Upgrades: halt', action: 'upgrade.halt', owner: 'own' },
  { what: 'Incidents of the overlay', action: 'incident.list', owner: 'own' },
  { what: 'Rules, their trial on history, maintenance windows: look', action: 'rule.list', owner: 'own' },
  { what: 'Rules: change', action: 'rule.change', owner: 'own' },
  { what: 'Maintenance windows: change', action: 'window.change', owner: 'own' },
  { what: 'Rehearsals and their answers: look', action: 'rehearsal.list', owner: 'own' },
  { what: 'Rehearsals: begin, plan, repeat', action: 'rehearsal.start', owner: 'of own nodes' },
  { what: 'Rehearsals: cancel', action: 'rehearsal.cancel', owner: 'own' },
  {
    what: 'Who shares it: contact, agents heard of joined',
    action: 'partner.list',
    owner: 'all, with invitations from operator on',
    partner: 'all but invitations',
  },
  { what: 'Contact and labels shown to others: change', action: 'partner.change', owner: 'own' },
  { what: 'Invite a team', action: 'partner.invite', owner: 'yes' },
  { what: 'End a team’s part', action: 'partner.end', owner: 'any partner’s', partner: 'own' },
  { what: 'Settings of the overlay', action: 'overlay.change', owner: 'yes' },
  { what: 'Signing key: look', action: 'signing-key.read', owner: 'yes' },
  { what: 'Signing key: replace', action: 'signing-key.rotate', owner: 'yes' },
]

export interface Reader {
  title: string
  team: 'owner' | 'partner' | 'stranger'
  role: Role
}

const roles: readonly Role[] = ['viewer', 'operator', 'owner']
export const READERS: readonly Reader[] = [
  ...roles.map((role) => ({ title: `owning team: ${role}`, team: 'owner' as const, role })),
  ...roles.map((role) => ({ title: `partner: ${role}`, team: 'partner' as const, role })),
  { title: 'anyone else', team: 'stranger', role: 'owner' },
]

/** What stands in a cell; null where it is refused. As the checks themselves decide it. */
export function cellOf(
  { action, owner, partner = owner }: OverlayRow,
  { team, role }: Reader,
): string | null {
  const caller: Caller = {
    ...{ kind: 'user', userId: '', email: '', name: '' },
    teams: [{ teamId: team, slug: team, name: team, role }],
  }
  const parties = { ownerTeamId: 'owner', partnerTeamIds: ['partner'] }
  const { decision, standing } = actingFor(permissionOf(action), caller, parties)
  if (decision !== 'allowed') return null
  return standing === 'owner' ? owner : partner
}

/** As Markdown. */
export function overlayTable(): string {
  const row = (cells: readonly string[]) => `| ${cells.join(' | ')} |`
  return [
    row(['', ...READERS.map(({ title }) => title)]),
    row(['---', ...READERS.map(() => '---')]),
    ...OVERLAY_ROWS.map((each) => row([each.what, ...READERS.map((reader) => cellOf(each, reader) ?? '–')])),
  ].join('\n')
}
