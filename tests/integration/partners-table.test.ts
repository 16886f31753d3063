import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { cellOf, OVERLAY_ROWS, READERS, type Reader } from '@/lib/auth/overlay-table'
import { type ActionName, permissionOf } from '@/lib/auth/permissions'
import {
  cancelRehearsal,
  changePart,
  createInvitation,
  createJoiningCode,
  createRehearsal,
  createRule,
  createWindow,
  endPartnership,
  getOverlay,
  getSigningKey,
  getUpgrades,
  haltUpgrade,
  listJoiningCodes,
  listPartners,
  listRehearsals,
  listRules,
  offerUpgrade,
  readmitAgent,
  retireAgent,
  revokeAgent,
  revokeJoiningCode,
  rotateSigningKey,
  setRetireAfter,
} from '@/lib/data'
import { listEvents } from '@/lib/data/events'
import { exportOverlay } from '@/lib/data/export'
import { listOverlayIncidents } from '@/lib/data/incidents'
import { listLinks } from '@/lib/data/links'
import { listNodes } from '@/lib/data/nodes'
import { getReading } from '@/lib/data/readings'
import { newRehearsalSchema } from '@/lib/data/rehearsal-dto'
import { getReinforcement, withdrawLink } from '@/lib/data/reinforcement'
import type { Call } from '@/lib/http/call'
import { DEFAULT_RULES } from '@/lib/warn/default-rules'
import { openSharedOverlay, type SharedOverlay } from '@/tests/support/shared-overlay'

import { tried } from '@/tests/support/tried'

let shared: SharedOverlay
beforeAll(async () => {
  shared = await openSharedOverlay()
})
afterAll(() => shared.close())

const slug = 'tides'
const page = { limit: 100 }

const readerCall = ({ team, role }: Reader) =>
  shared.callAs(team === 'owner' ? 'harbourline' : team === 'partner' ? 'skerry' : 'eelholm', role)

const rule = { ...DEFAULT_RULES[0]!, callOrderId: null }
const window = {
  startsAt: new Date(Date.now() + 3_600_000).toISOString(),
  endsAt: new Date(Date.now() + 7_200_000).toISOString(),
  ...{ repeats: null, label: null, reason: 'New disks' },
}
const rehearsal = (node: string) =>
  newRehearsalSchema.parse({ exclude: { nodes: [node] }, startsAt: '2040-01-04T22:00:00.000Z' })
const NOWHERE = '00000000-0000-4000-8000-000000000000'

/** Each does what its row of the table says, on the caller's own part of the overlay. */
const ATTEMPTS: Partial<Record<ActionName, (call: Call, own: string) => Promise<unknown>>> = {
  'overlay.read': (call) => getOverlay(call, slug),
  'reading.read': (call) => getReading(call, slug),
  'node.list': (call) => listNodes(call, slug, page),
  'link.list': (call) => listLinks(call, slug, page),
  'event.read': (call) => listEvents(call, slug),
  'export.read': (call) => exportOverlay(call, slug, 'overlay.graphml'),
  'reinforcement.read': (call) => getReinforcement(call, slug, { links: 1 }),
  'reinforcement.plan': (call) => withdrawLink(call, slug, NOWHERE),
  'joining-code.list': (call) => listJoiningCodes(call, slug),
  'joining-code.create': (call) => createJoiningCode(call, slug, { uses: 1, expiresInHours: 1 }),
  'joining-code.revoke': (call) => revokeJoiningCode(call, slug, NOWHERE),
  'agent.revoke': (call, own) => revokeAgent(call, slug, own),
  'agent.retire': (call, own) => retireAgent(call, slug, own),
  'agent.readmit': (call, own) => readmitAgent(call, slug, own),
  'upgrade.read': (call) => getUpgrades(call, slug),
  'upgrade.offer': (call) => offerUpgrade(call, slug, { version: 'none', label: null }),
  'upgrade.halt': (call) => haltUpgrade(call, slug, NOWHERE),
  'incident.list': (call) => listOverlayIncidents(call, slug, page),
  'rule.list': (call) => listRules(call, slug),
  'rule.change': (call) => createRule(call, slug, rule),
  'window.change': (call) => createWindow(call, slug, window),
  'rehearsal.list': (call) => listRehearsals(call, slug),
  'rehearsal.start': (call, own) => createRehearsal(call, slug, rehearsal(own)),
  'rehearsal.cancel': (call) => cancelRehearsal(call, slug, NOWHERE),
  'partner.list': (call) => listPartners(call, slug),
  'partner.change': (call) => changePart(call, slug, { contact: 'us' }),
  'partner.invite': (call) => createInvitation(call, slug, { expiresInHours: 1 }),
  'partner.end': (call) => endPartnership(call, slug, 'skerry'),
  'overlay.change': (call) => setRetireAfter(call, slug, 6),
  'signing-key.read': (call) => getSigningKey(call, slug),
  'signing-key.rotate': (call) => rotateSigningKey(call, slug),
}
/** What is named in an attempt is not there: that is said to those only who got past the checks. */
const BEYOND: Partial<Record<ActionName, string>> = {
  'joining-code.revoke': 'not-found',
  'upgrade.offer': 'invalid-input',
  'upgrade.halt': 'not-found',
  'reinforcement.plan': 'not-found',
  'rehearsal.cancel': 'not-found',
}

describe('each cell of the table', () => {
  const cells = OVERLAY_ROWS.flatMap((row) => READERS.map((reader) => ({ row, reader })))

  it.each(cells)('$row.action, as $reader.title', async ({ row, reader }) => {
    const own = reader.team === 'owner' ? 'tar-01' : 'ske-01'
    const attempt = ATTEMPTS[row.action]!
    const call = readerCall(reader)
    const { refused } = await tried(call, (inside) => attempt(inside, own))
    if (cellOf(row, reader) !== null) return expect(refused).toBe(BEYOND[row.action])
    // Nobody outside learns that there is such an overlay.
    expect(refused).toBe(reader.team === 'stranger' ? 'not-found' : 'forbidden')
  })

  it('is tried', () => {
    expect(cells.length).toBe(OVERLAY_ROWS.length * 7)
    expect(OVERLAY_ROWS.filter(({ action }) => !ATTEMPTS[action])).toEqual([])
    for (const { action } of OVERLAY_ROWS) expect(permissionOf(action).who).toBe('member')
  })
})
