import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { listDeliveries, retryDelivery } from '@/lib/data/deliveries'
import { deliveriesSchema } from '@/lib/data/delivery-dto'
import { listKeptMessages } from '@/lib/data/kept-messages'
import { testChannel, testWebhook } from '@/lib/data/send-test'
import type { AppError } from '@/lib/http/app-error'
import { callAsUser } from '../support/people'
import { PostOffice } from '../support/post-office'

let office: PostOffice
beforeAll(async () => {
  office = await PostOffice.open()
})
afterAll(() => office.close())
beforeEach(() => office.clear())

const as = (role: 'owner' | 'operator') =>
  callAsUser(office.database, office.team.members[role === 'owner' ? 0 : 1]!.userId, office.now())
const codeOf = (work: Promise<unknown>) =>
  work.then(
    () => 'done',
    (error: AppError) => error.code,
  )

describe('the delivery log', () => {
  it('says what went to whom, with each attempt and its answer, newest first', async () => {
    await office.channel('sms', '+12025550111')
    const webhookId = await office.webhook(`${office.http.url}/webhook/500`)
    const body = await office.incident('urgent')
    office.sender()
    await office.enqueue(body, 'raised')
    await office.atRest()
    await office.clock.advance(1_000)
    await office.enqueue(body, 'graver', { webhookId })
    await office.atRest()
    const log = await listDeliveries(await as('operator'), { limit: 100 })
    expect(deliveriesSchema.parse(log)).toEqual(log)
    const [later, first] = log.items
    const [raisedAt, now] = [body.at, office.now().toISOString()]
    const common = { incident: { id: body.incident?.id, number: body.incident?.number }, overlay: 'Tideline' }
    expect(later).toMatchObject({
      ...common,
      kind: 'graver',
      by: 'webhook',
      state: 'waiting',
      writtenAt: now,
      dueAt: new Date(office.now().getTime() + 5_000).toISOString(),
      endedAt: null,
      attempts: [{ number: 1, startedAt: now, endedAt: now, outcome: 'again', answer: 'HTTP 500.' }],
    })
    expect(first).toMatchObject({
      ...common,
      kind: 'raised',
      by: 'sms',
      to: 'owner 0',
      state: 'sent',
      dueAt: null,
      endedAt: raisedAt,
      attempts: [{ number: 1, outcome: 'sent' }],
    })
  })

  it('comes in pages, and of one incident where asked', async () => {
    const webhookId = await office.webhook()
    const bodies = [await office.incident(), await office.incident(), await office.incident()]
    for (const body of bodies) await office.enqueue(body, 'raised', { webhookId })
    const call = await as('operator')
    const seen: (string | undefined)[] = []
    let after: string | undefined
    do {
      const page = await listDeliveries(call, { limit: 2, after })
      seen.push(...page.items.map(({ incident }) => incident?.id))
      after = page.next ?? undefined
    } while (after)
    expect(seen.sort()).toEqual(bodies.map(({ incident }) => incident?.id).sort())
    const one = await listDeliveries(call, { limit: 2, incident: bodies[1]?.incident?.id })
    expect(one.items.map(({ incident }) => incident?.id)).toEqual([bodies[1]?.incident?.id])
  })
})

describe('sending again by hand', () => {
  it('puts what failed behind what waits in its line, under the same key, and begins the schedule anew', async () => {
    let isRefused = true
    office.answer = (_call, response) => {
      response.writeHead(isRefused ? 500 : 204).end()
      return true
    }
    const webhookId = await office.webhook()
    const body = await office.incident()
    office.sender()
    await office.enqueue(body, 'raised', { webhookId })
    await office.pass(76 * 3_600_000)
    const [failed] = await office.rows()
    expect(failed).toMatchObject({ state: 'failed', attempts: 10 })
    expect(failed?.answers.at(-1)).toBe('HTTP 500. That was the last try: send it again by hand.')
    isRefused = false
    const call = await as('operator')
    await call.em.transactional(async (tx) => retryDelivery({ ...call, em: tx }, failed!.id))
    await office.atRest()
    const [sent] = await office.rows()
    expect(sent).toMatchObject({ id: failed?.id, state: 'sent', attempts: 11, sequence: 2 })
    expect(office.kept.calls[0]?.headers['webhook-id']).toBe(failed?.id)
    expect(await codeOf(retryDelivery(await as('operator'), failed!.id))).toBe('not-failed')
    expect(await codeOf(retryDelivery(await as('operator'), 'no-such'))).toBe('not-found')
  })
})

describe('a test', () => {
  it('goes to the one channel, at any hour, and not twice in a row', async () => {
    const quiet = { from: '00:00', to: '00:00', zone: 'UTC' }
    const channel = await office.channel('sms', '+12025550111', { leastSeverity: 'urgent', quiet })
    await office.channel('sms', '+12025550112')
    office.sender()
    await testChannel(await as('owner'), channel)
    await office.atRest()
    expect(office.kept.texts.map(({ to, text }) => [to, text])).toEqual([
      ['+12025550111', 'Thinspan test for Harbourline: nothing has happened, nothing is to be done.'],
    ])
    expect(await codeOf(testChannel(await as('owner'), channel))).toBe('throttled')
    await office.clock.advance(21_000)
    expect(await codeOf(testChannel(await as('owner'), channel))).toBe('done')
  })

  it('is for one’s own channels, and of a webhook for owners', async () => {
    const channel = await office.channel('sms', '+12025550111')
    const webhook = await office.webhook()
    expect(await codeOf(testChannel(await as('operator'), channel))).toBe('not-found')
    expect(await codeOf(testWebhook(await as('operator'), webhook))).toBe('forbidden')
    expect(await codeOf(testWebhook(await as('owner'), webhook))).toBe('done')
    office.sender()
    await office.atRest()
    const components = { fetch: (url: string) => fetch(url) }
    const kept = await listKeptMessages(await as('owner'), components, office.http.url)
    expect(
      kept.calls.map(({ signedAs, body }) => [signedAs?.startsWith('harbour board'), JSON.parse(body).type]),
    ).toEqual([[true, 'test']])
  })
})
