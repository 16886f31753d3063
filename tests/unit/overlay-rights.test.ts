import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'
import type { Caller, TeamRole } from '@/lib/auth/caller'
import { actingFor } from '@/lib/auth/overlay-rights'
import { OVERLAY_ROWS, overlayTable } from '@/lib/auth/overlay-table'
import { type ActionName, PERMISSIONS, permissionOf } from '@/lib/auth/permissions'

const team = (teamId: string, role: TeamRole['role']): TeamRole => ({
  teamId,
  slug: teamId,
  name: teamId,
  role,
})
const user = (...teams: TeamRole[]): Caller => ({ kind: 'user', userId: 'u', email: 'e', name: 'n', teams })
const parties = { ownerTeamId: 'harbourline', partnerTeamIds: ['skerry', 'pinnet'] }
const acting = (action: ActionName, caller: Caller) => actingFor(permissionOf(action), caller, parties)

describe('who acts for which of an overlay’s teams', () => {
  it('is the owning team before a partner, where a person belongs to both', () => {
    const both = user(team('skerry', 'owner'), team('harbourline', 'operator'))
    expect(acting('rule.change', both)).toEqual({
      decision: 'allowed',
      teamId: 'harbourline',
      standing: 'owner',
    })
  })

  it('is the team in which the role reaches, for what is seen as for what is done', () => {
    const both = user(team('harbourline', 'viewer'), team('skerry', 'operator'))
    expect(acting('rule.change', both)).toMatchObject({ decision: 'allowed', teamId: 'skerry' })
    expect(acting('rule.list', both)).toMatchObject({ decision: 'allowed', teamId: 'skerry' })
    const lookers = user(team('skerry', 'viewer'), team('harbourline', 'viewer'))
    expect(acting('rule.list', lookers)).toMatchObject({ teamId: 'harbourline', standing: 'owner' })
  })

  it('is the team they chose, whatever their role there, as long as it is one of theirs', () => {
    const both = user(team('harbourline', 'owner'), team('skerry', 'viewer'))
    const asSkerry = { ...both, actingFor: 'skerry' } as Caller
    expect(acting('rehearsal.list', asSkerry)).toMatchObject({ decision: 'allowed', teamId: 'skerry' })
    expect(acting('rehearsal.start', asSkerry)).toMatchObject({ decision: 'forbidden', teamId: 'skerry' })
    expect(acting('overlay.change', asSkerry)).toMatchObject({ decision: 'owner-only', teamId: 'skerry' })
    const asPinnet = { ...both, actingFor: 'pinnet' } as Caller
    expect(acting('rehearsal.start', asPinnet)).toMatchObject({ decision: 'allowed', teamId: 'harbourline' })
  })

  it('is the owning one for what is open to that alone, where nobody chose another', () => {
    const both = user(team('harbourline', 'viewer'), team('skerry', 'operator'))
    expect(acting('signing-key.read', both)).toMatchObject({ decision: 'forbidden', teamId: 'harbourline' })
  })

  it('is a partner for what is open to partners, as far as the role reaches', () => {
    const operator = user(team('pinnet', 'operator'))
    expect(acting('joining-code.create', operator)).toMatchObject({ decision: 'allowed', teamId: 'pinnet' })
    expect(acting('joining-code.create', user(team('pinnet', 'viewer')))).toMatchObject({
      decision: 'forbidden',
      teamId: 'pinnet',
    })
    expect(acting('overlay.change', operator)).toMatchObject({ decision: 'owner-only', teamId: 'pinnet' })
  })

  it('is nobody outside all of them', () => {
    expect(acting('overlay.read', user(team('eelholm', 'owner')))).toMatchObject({ decision: 'not-found' })
    expect(acting('overlay.read', { kind: 'anyone' })).toMatchObject({ decision: 'not-signed-in' })
  })

  it('is the owning team for programs of the server', () => {
    expect(acting('overlay.change', { kind: 'system', name: 'x' })).toMatchObject({
      decision: 'allowed',
      teamId: 'harbourline',
    })
  })

  it('is open to partners where a team’s own part of the overlay is meant, and nowhere else', () => {
    const open = Object.entries(PERMISSIONS)
      .filter(([, permission]) => 'partner' in permission && permission.partner)
      .map(([action]) => action)
    expect(open).not.toContain('overlay.change')
    expect(open.filter((action) => /^(signing-key|audit|member|team)\./.test(action))).toEqual([])
  })
})

/** As wide as the formatter makes them. */
const unpadded = (table: string) => table.replace(/ +/g, ' ').replace(/-{3,}/g, '---')

describe('the table of who sees what', () => {
  it('stands in the documentation as the checks decide it', () => {
    const text = readFileSync(new URL('../../docs/partners.md', import.meta.url), 'utf8')
    // Else: npx tsx scripts/write-partners-table.ts
    expect(unpadded(text)).toContain(unpadded(overlayTable()))
  })

  it('has every action that is open to partners', () => {
    const open = Object.entries(PERMISSIONS)
      .filter(([, permission]) => 'partner' in permission && permission.partner)
      .map(([action]) => action)
    const rows = new Set<string>(OVERLAY_ROWS.map(({ action }) => action))
    expect(open.filter((action) => !rows.has(action))).toEqual([])
  })
})
