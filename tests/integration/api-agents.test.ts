import { createHash } from 'node:crypto'
import { beforeEach, describe, expect, it } from 'vitest'
import { POST as readmit } from '@/app/api/v1/overlays/[slug]/nodes/[name]/readmission/route'
import { POST as revoke } from '@/app/api/v1/overlays/[slug]/nodes/[name]/revocation/route'
import { DELETE as retire } from '@/app/api/v1/overlays/[slug]/nodes/[name]/route'
import { GET as listNodes } from '@/app/api/v1/overlays/[slug]/nodes/route'
import { PATCH as change } from '@/app/api/v1/overlays/[slug]/route'
import { DELETE as halt } from '@/app/api/v1/overlays/[slug]/upgrades/[id]/route'
import { GET as getUpgrades, POST as offer } from '@/app/api/v1/overlays/[slug]/upgrades/route'
import { AgentSchema, AgentSessionSchema, AuditEntrySchema, OverlayEventSchema } from '@/entities'
import type { Role } from '@/lib/auth/permissions'
import { nodeSchema, nodesSchema, overlaySchema, upgradeOfferDtoSchema, upgradesSchema } from '@/lib/data/dto'
import { addRelease, findRelease } from '@/lib/data/upgrades'
import type { RouteHandler } from '@/lib/http/route'
import { upgradeText, verifyText } from '@/lib/protocol'
import {
  ask,
  deliver,
  joinAgent,
  type Member,
  problemOf,
  seedCode,
  sendReport,
} from '@/tests/support/collector'
import { overlayPerTest } from '@/tests/support/overlay-per-test'
import { healthyReport, someReport } from '@/tests/support/reports'

const seeded = overlayPerTest()

let tar: Member
let eel: Member

beforeEach(async () => {
  const code = await seedCode(seeded.team.database, seeded.overlay.id, { uses: 9 })
  tar = await joinAgent(code, 'tar-01', { harbour: 'Tarnwick' }, { node: '10.1.0.1' })
  eel = await joinAgent(code, 'eel-09', { harbour: 'Eelholm' })
})

type Init = { params?: Record<string, string>; body?: unknown; query?: string }
const as = (role: Role, handler: RouteHandler, method: string, init: Init = {}) =>
  ask(handler, method, {
    ...init,
    bearer: seeded.team.token(role),
    params: { slug: seeded.overlay.slug, ...init.params },
  })
const on = (name: string) => ({ params: { name } })
const nodes = async (query = '') =>
  nodesSchema.parse(await (await as('viewer', listNodes, 'GET', { query })).json()).items
const events = async () =>
  (
    await seeded.em().find(OverlayEventSchema, { overlayId: seeded.overlay.id }, { orderBy: { id: 'asc' } })
  ).map(({ text }) => text)

describe('an operator', () => {
  it('revokes a node: its sessions end with it, it is entered and said, and a second time changes nothing', async () => {
    const revoked = nodeSchema.parse(await (await as('operator', revoke, 'POST', on('tar-01'))).json())
    expect(revoked).toMatchObject({ name: 'tar-01', state: 'revoked', endedAt: expect.any(String) })
    expect(await seeded.em().count(AgentSessionSchema, { agent: tar.agentId })).toBe(0)
    expect(await problemOf(await sendReport(tar, someReport(1)))).toEqual([401, 'bad-token'])
    expect((await as('operator', revoke, 'POST', on('tar-01'))).status).toBe(200)
    expect((await events()).filter((text) => text === 'tar-01 was revoked')).toHaveLength(1)
    const where = {
      action: 'agent.revoke',
      subject: `${seeded.overlay.slug}: tar-01`,
      outcome: 'ok' as const,
    }
    expect(await seeded.em().count(AuditEntrySchema, where)).toBe(2)
    expect(await problemOf(await as('operator', readmit, 'POST', on('tar-01')))).toEqual([409, 'wrong-state'])
  })

  it('retires a node, also a revoked one, which gives its name free; it stays listed until another has it', async () => {
    await as('operator', revoke, 'POST', on('eel-09'))
    const retired = nodeSchema.parse(await (await as('operator', retire, 'DELETE', on('eel-09'))).json())
    expect(retired.state).toBe('left')
    expect((await nodes()).map(({ name, state }) => [name, state])).toEqual([
      ['eel-09', 'left'],
      ['tar-01', 'unheard'],
    ])
    for (const handler of [revoke, readmit])
      expect(await problemOf(await as('operator', handler, 'POST', on('eel-09')))).toEqual([
        409,
        'wrong-state',
      ])
    await joinAgent(await seedCode(seeded.team.database, seeded.overlay.id), 'eel-09')
    expect((await nodes()).map(({ state }) => state)).toEqual(['unheard', 'unheard'])
  })

  it('readmits one that was left out', async () => {
    const out = { state: 'left-out' as const, leftOutBecause: 'its means do not fit', endedAt: new Date() }
    await seeded.em().nativeUpdate(AgentSchema, { id: tar.agentId }, out)
    expect((await nodes()).at(-1)).toMatchObject({
      state: 'left-out',
      leftOutBecause: 'its means do not fit',
    })
    const back = nodeSchema.parse(await (await as('operator', readmit, 'POST', on('tar-01'))).json())
    expect(back).toMatchObject({ state: 'unheard', leftOutBecause: null, endedAt: null })
    expect(await events()).toContain('tar-01 was readmitted')
  })

  it('says after how long unheard nodes are retired', async () => {
    const changed = await as('operator', change, 'PATCH', { body: { retireAfterHours: 72 } })
    expect(overlaySchema.parse(await changed.json()).retireAfterHours).toBe(72)
    const never = await as('operator', change, 'PATCH', { body: { retireAfterHours: null } })
    expect(overlaySchema.parse(await never.json()).retireAfterHours).toBeNull()
  })

  const refused: [string, Role, RouteHandler, string, Init, number, string][] = [
    ['revoking as a viewer', 'viewer', revoke, 'POST', on('tar-01'), 403, 'forbidden'],
    ['retiring as a viewer', 'viewer', retire, 'DELETE', on('tar-01'), 403, 'forbidden'],
    ['readmitting as a viewer', 'viewer', readmit, 'POST', on('tar-01'), 403, 'forbidden'],
    ['a node there is not', 'operator', revoke, 'POST', on('gul-04'), 404, 'not-found'],
    [
      'retiring after half an hour',
      'operator',
      change,
      'PATCH',
      { body: { retireAfterHours: 0.5 } },
      400,
      'invalid-input',
    ],
    [
      'retiring after two years',
      'operator',
      change,
      'PATCH',
      { body: { retireAfterHours: 17_520 } },
      400,
      'invalid-input',
    ],
    ['a change without a word', 'operator', change, 'PATCH', { body: {} }, 400, 'invalid-input'],
    [
      'nodes by a label without a value',
      'viewer',
      listNodes,
      'GET',
      { query: '?label=harbour' },
      400,
      'invalid-input',
    ],
    ['offering as a viewer', 'viewer', offer, 'POST', { body: { version: '0.2.0' } }, 403, 'forbidden'],
    [
      'offering what is not held',
      'operator',
      offer,
      'POST',
      { body: { version: '9.9.9' } },
      400,
      'invalid-input',
    ],
    ['offering nothing', 'operator', offer, 'POST', { body: { version: '' } }, 400, 'invalid-input'],
    ['halting what is no offer', 'operator', halt, 'DELETE', { params: { id: 'x' } }, 404, 'not-found'],
    [
      'halting as a viewer',
      'viewer',
      halt,
      'DELETE',
      { params: { id: crypto.randomUUID() } },
      403,
      'forbidden',
    ],
  ]
  it.each(refused)('is refused %s', async (_, role, handler, method, init, status, code) => {
    expect(await problemOf(await as(role, handler, method, init))).toEqual([status, code])
  })
})

describe('nodes', () => {
  it('say how their agents fare, as far as they say so themselves', async () => {
    await deliver(tar, someReport(1))
    const source = { kind: 'file', error: 'neighbours.txt: no such file' }
    await deliver(eel, {
      ...healthyReport(3, { withoutAgent: 2, refused: 1, lastError: 'the socket <b>closed</b>', source }),
      protocol: 2,
    })
    const [first, second] = await nodes()
    expect(first).toMatchObject({
      name: 'eel-09',
      node: null,
      relayed: false,
      joinedAt: expect.any(String),
      health: {
        uptimeSeconds: 3,
        clockSkewMs: -3,
        reportTookMs: 12,
        ticksLateShare: 0.05,
        lastError: 'the socket <b>closed</b>',
        linkKind: 'path',
        linksKnown: 2,
        withoutAgent: 2,
        source,
        weakestWeight: 0.8,
        meanWeight: 0.9,
        refusedNeighbours: 1,
        auditImbalance: 0,
        upgrade: null,
      },
    })
    expect([second?.name, second?.node, second?.health]).toEqual(['tar-01', '10.1.0.1', null])
    const unbalanced = healthyReport(4)
    const [colony] = unbalanced.sums.colonies
    await deliver(eel, {
      ...unbalanced,
      sums: { ...unbalanced.sums, colonies: [{ ...colony!, heldX: 107 }] },
    })
    expect((await nodes())[0]?.health?.auditImbalance).toBe(7)
  })

  it('are listed by label, also where the value has an equals sign', async () => {
    await joinAgent(await seedCode(seeded.team.database, seeded.overlay.id), 'pin-02', { rack: 'a=1' })
    const named = async (label: string) =>
      (await nodes(`?label=${encodeURIComponent(label)}`)).map(({ name }) => name)
    expect([await named('harbour=Tarnwick'), await named('rack=a=1'), await named('harbour=')]).toEqual([
      ['tar-01'],
      ['pin-02'],
      [],
    ])
  })
})

describe('upgrades', () => {
  const bytes = new TextEncoder().encode('#!/usr/bin/env node\n// the agent')
  const sha256 = createHash('sha256').update(bytes).digest('hex')
  const all = async () => upgradesSchema.parse(await (await as('viewer', getUpgrades, 'GET')).json())
  const make = async (body: object) =>
    upgradeOfferDtoSchema.parse(await (await as('operator', offer, 'POST', { body })).json())

  it('are kept as releases, the last added being current, and given back byte for byte', async () => {
    expect(await findRelease(seeded.em(), null)).toBeNull()
    await addRelease(seeded.em(), { version: '0.1.0', sha256, bytes })
    await addRelease(seeded.em(), { version: '0.2.0', sha256, bytes })
    await addRelease(seeded.em(), { version: '0.2.0', sha256, bytes })
    expect((await all()).releases.map(({ version, bytes, current }) => [version, bytes, current])).toEqual([
      ['0.2.0', 32, true],
      ['0.1.0', 32, false],
    ])
    expect(await findRelease(seeded.em(), '0.1.0')).toEqual({ version: '0.1.0', sha256, bytes })
    await addRelease(seeded.em(), { version: '0.1.0', sha256, bytes })
    expect((await findRelease(seeded.em(), null))?.version).toBe('0.1.0')
    expect(await findRelease(seeded.em(), '0.9.0')).toBeNull()
    await expect(
      addRelease(seeded.em(), { version: '0.3.0', sha256: 'ab'.repeat(32), bytes }),
    ).rejects.toThrow('digest')
  })

  it('go to the agents of a label with their replies, are counted, and stop when halted', async () => {
    await addRelease(seeded.em(), { version: '0.2.0', sha256, bytes })
    const { id, counts } = await make({ version: '0.2.0', label: { key: 'harbour', value: 'Tarnwick' } })
    expect(counts).toEqual({ offered: 1, runs: 0, failed: 0, waiting: 0, declined: 0 })
    const { upgrade } = await deliver(tar, { ...healthyReport(1), protocol: 2 })
    expect(upgrade).toMatchObject({
      version: '0.2.0',
      sha256,
      path: '/agent/thinspan-agent.mjs?version=0.2.0',
    })
    expect(verifyText(upgrade!.key, upgradeText(seeded.overlay.id, upgrade!), upgrade!.signature)).toBe(true)
    expect((await deliver(eel, { ...healthyReport(1), protocol: 2 })).upgrade).toBeNull()
    expect(await deliver(eel, someReport(2))).not.toHaveProperty('upgrade')
    expect((await all()).offers[0]?.counts.waiting).toBe(1)
    const failed = { version: '0.2.0', state: 'failed' as const, error: 'the digest is another' }
    await deliver(tar, { ...healthyReport(2, { upgrade: failed }), protocol: 2 })
    const now = await all()
    expect(now.offers).toMatchObject([
      { id, version: '0.2.0', offeredBy: 'operator 1', haltedAt: null, counts: { failed: 1, waiting: 0 } },
    ])
    expect(now.versions).toEqual([{ version: '0.1.0', agents: 2 }])
    const halted = await as('operator', halt, 'DELETE', { params: { id } })
    expect(upgradeOfferDtoSchema.parse(await halted.json()).haltedAt).not.toBeNull()
    expect((await as('operator', halt, 'DELETE', { params: { id } })).status).toBe(200)
    expect((await deliver(tar, { ...healthyReport(3), protocol: 2 })).upgrade).toBeNull()
    expect((await events()).slice(-2)).toEqual([
      'Version 0.2.0 offered to harbour = Tarnwick',
      'Version 0.2.0 is offered no more',
    ])
    expect(seeded.team.failures).toEqual([])
  })
})
