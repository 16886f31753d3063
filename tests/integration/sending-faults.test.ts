import { once } from 'node:events'
import { createServer } from 'node:http'
import pg from 'pg'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { sql } from '@/lib/db'
import { WebhookWay } from '@/lib/notify/webhook'
import { REPEAT_SENTENCE } from '@/lib/notify/wording'
import { startFakeSmtp } from '@/scripts/fakes/index'
import { portOf } from '@/scripts/fakes/port-of'
import { freePort } from '../support/free-port'
import { PostOffice } from '../support/post-office'
import { until } from '../support/until'

let office: PostOffice
beforeAll(async () => {
  office = await PostOffice.open()
})
afterAll(() => office.close())
beforeEach(() => office.clear())

const MINUTE_MS = 60_000
const bodiesSaid = () => office.kept.calls.map(({ body }) => JSON.parse(body))

describe('a mail server that is down for an hour', () => {
  it('is tried again and again, and then gets every mail once and in order', async () => {
    const port = await freePort()
    await office.channel('email', 'owner@harbourline.example')
    await office.channel('email', 'second@harbourline.example')
    const body = await office.incident('urgent')
    office.sender({ settings: { THINSPAN_SMTP_URL: `smtp://127.0.0.1:${port}` } })
    const startMs = office.clock.epochMs()
    for (const kind of ['raised', 'graver', 'taken'] as const) await office.enqueue(body, kind)
    await office.pass(59 * MINUTE_MS)
    expect(office.kept.mails).toEqual([])
    const down = await office.rows()
    expect(down.map(({ state, attempts }) => [state, attempts])).toEqual(
      [0, 1].flatMap(() => [
        ['waiting', 11],
        ['waiting', 0],
        ['waiting', 0],
      ]),
    )
    expect(new Set(down.flatMap(({ answers }) => answers))).toEqual(
      new Set([`connect ECONNREFUSED 127.0.0.1:${port}`]),
    )
    const smtp = await startFakeSmtp({ kept: office.kept, now: () => office.now() }, { port })
    await office.pass(10 * MINUTE_MS)
    await smtp.stop()
    for (const address of ['owner@harbourline.example', 'second@harbourline.example']) {
      const mails = office.kept.mails.filter(({ to }) => to[0] === address).reverse()
      expect(mails.map(({ text }) => text.split('\n')[0])).toEqual([
        'New incident.',
        'It has become graver.',
        'Somebody has it.',
      ])
      expect(mails.some(({ text }) => text.includes(REPEAT_SENTENCE))).toBe(false)
    }
    expect(office.clock.epochMs() - startMs).toBe(69 * MINUTE_MS)
  })
})

describe('a receiver', () => {
  it('that answers 500 is tried again by the published schedule, and what follows in its line waits', async () => {
    const webhookId = await office.webhook()
    const body = await office.incident()
    const atMs: number[] = []
    const startMs = office.clock.epochMs()
    office.answer = (_call, response) => {
      atMs.push(office.clock.epochMs() - startMs)
      if (atMs.length > 3) return false
      response.writeHead(500).end('the harbour board is being painted')
      return true
    }
    office.sender()
    await office.enqueue(body, 'raised', { webhookId })
    await office.enqueue(body, 'cleared', { webhookId })
    await office.pass(36 * MINUTE_MS)
    expect(atMs.map((ms) => ms / 1000)).toEqual([0, 5, 305, 2105, 2105])
    expect(
      bodiesSaid()
        .map(({ type }) => type)
        .reverse(),
    ).toEqual([...Array<string>(4).fill('incident.raised'), 'incident.cleared'])
    const [first] = await office.rows()
    expect(first?.outcomes).toEqual(['again', 'again', 'again', 'sent'])
    expect(first?.answers[0]).toBe('HTTP 500. the harbour board is being painted')
    expect(new Set(office.kept.calls.slice(1).map(({ headers }) => headers['webhook-id']))).toEqual(
      new Set([first?.id]),
    )
  })

  it('that hangs holds nobody else up, is given up in time, and hears next that it may be a repeat', async () => {
    const hanging = await office.webhook(`${office.http.url}/webhook/202`)
    const prompt = await office.webhook()
    let hangs = 1
    office.answer = ({ path }) => path.endsWith('202') && hangs-- > 0
    office.sender()
    const body = await office.incident()
    await office.enqueue(body, 'raised', { webhookId: hanging })
    await office.enqueue(body, 'raised', { webhookId: prompt })
    await until(async () => (await office.rows()).some(({ state }) => state === 'sent'))
    await until(() => office.kept.calls.length === 2)
    expect((await office.rows()).map(({ state }) => state).sort()).toEqual(['sending', 'sent'])
    await office.clock.advance(15_000)
    await office.pass(5_000)
    const [row] = (await office.rows()).filter(({ line }) => line.endsWith(hanging))
    expect(row).toMatchObject({ state: 'sent', outcomes: ['unknown', 'sent'] })
    expect(row?.answers[0]).toBe('There was no answer in time. It may have arrived.')
    const calls = office.kept.calls.filter(({ path }) => path.endsWith('202')).reverse()
    expect(calls.map(({ body }) => JSON.parse(body).data.repeat ?? null)).toEqual([null, REPEAT_SENTENCE])
    expect(calls.map(({ headers }) => headers['webhook-id'])).toEqual([row?.id, row?.id])
  })

  it('that redirects is not followed, least of all to where webhooks may not reach', async () => {
    let reached = 0
    const inside = createServer((_request, response) => {
      reached += 1
      response.end()
    })
    inside.listen(0, '127.0.0.1')
    await once(inside, 'listening')
    const webhookId = await office.webhook()
    office.answer = (_call, response) => {
      response.writeHead(302, { location: `http://127.0.0.1:${portOf(inside)}/` }).end()
      return true
    }
    office.sender()
    await office.enqueue(await office.incident(), 'raised', { webhookId })
    await office.atRest()
    const [row] = await office.rows()
    expect([row?.state, row?.answers, reached]).toEqual([
      'waiting',
      ['HTTP 302: redirects are not followed. Enter the new address.'],
      0,
    ])
    inside.close()
  })

  it('that is gone is turned off and says so; what still waited for it fails with the reason', async () => {
    const webhookId = await office.webhook(`${office.http.url}/webhook/410`)
    office.sender()
    const body = await office.incident()
    await office.enqueue(body, 'raised', { webhookId })
    await office.enqueue(body, 'cleared', { webhookId })
    await office.atRest()
    const because = 'The receiver answered 410 Gone: it wants nothing more, so this webhook was turned off.'
    expect((await office.rows()).map(({ state, answers }) => [state, answers])).toEqual([
      ['failed', [because]],
      ['failed', [`Not sent: the webhook is turned off. ${because}`]],
    ])
    expect(office.kept.calls).toHaveLength(1)
    const webhooks = await sql(
      office.em(),
      'select disabled_because, disabled_at is not null as off from webhooks',
    )
    expect(webhooks).toEqual([{ disabled_because: because, off: true }])
  })

  it.each([
    'http://127.0.0.1:PORT/',
    'http://localhost:PORT/',
    'http://2130706433:PORT/',
    'http://[::1]:PORT/',
    'http://[::ffff:127.0.0.1]:PORT/',
    'http://0.0.0.0:PORT/',
  ])('on this machine is not reached as %s', async (address) => {
    const webhookId = await office.webhook(address.replace('PORT', new URL(office.http.url).port))
    office.sender({ settings: { THINSPAN_FAKES_URL: '' } })
    await office.enqueue(await office.incident(), 'raised', { webhookId })
    await office.atRest()
    const [row] = await office.rows()
    expect([row?.state, office.kept.calls]).toEqual(['waiting', []])
    expect(row?.answers[0]).toContain('THINSPAN_WEBHOOK_PRIVATE')
  })

  it('whose name leads elsewhere at the moment of connecting is judged by that address', async () => {
    let asked = 0
    const resolve = ((_name: string, _options: object, callback: (...said: unknown[]) => void) => {
      asked += 1
      callback(null, [{ address: '127.0.0.1', family: 4 }])
    }) as never
    const way = new WebhookWay({ allowed: await allowedNone(), alsoOrigin: null, origin: null, resolve })
    const url = `http://board.harbourline.example:${new URL(office.http.url).port}/webhook`
    const body = await office.incident()
    const letter = {
      id: 'm',
      kind: 'raised' as const,
      body,
      firstSentence: null,
      mayBeRepeat: false,
      at: office.now(),
    }
    const answer = await way.send({ url, secrets: [] }, letter, new AbortController().signal)
    expect([asked, answer.outcome, office.kept.calls]).toEqual([1, 'again', []])
  })
})

async function allowedNone() {
  const { readPrivateAllowed } = await import('@/lib/notify/public-address')
  return readPrivateAllowed('')
}

describe('a sender', () => {
  it('whose database connections end in the middle of a send loses nothing and says nothing twice', async () => {
    const webhookId = await office.webhook()
    let haveEnded = false
    office.answer = async () => {
      await endConnections(office.database.url)
      haveEnded = true
      return false
    }
    office.sender()
    const body = await office.incident()
    await office.enqueue(body, 'raised', { webhookId })
    await until(() => haveEnded)
    office.answer = () => false
    // The pool finds one by one that its connections are gone.
    await until(() =>
      office.enqueue(body, 'cleared', { webhookId }).then(
        () => true,
        () => false,
      ),
    )
    await until(async () => {
      await office.clock.advance(1_000)
      return (await office.rows()).every(({ state }) => state === 'sent')
    })
    expect(bodiesSaid().map(({ type, data }) => [type, data.repeat ?? null])).toEqual([
      ['incident.cleared', null],
      ['incident.raised', null],
    ])
  })

  it('that ends between sending and recording leaves one repeat, which says so, to another', async () => {
    const webhookId = await office.webhook()
    let isDead = false
    office.answer = () => {
      isDead = true
      return false
    }
    const forkEm = async () => {
      if (isDead) throw new Error('killed')
      return office.em()
    }
    const killed = office.sender({ forkEm })
    const body = await office.incident()
    await office.enqueue(body, 'raised', { webhookId })
    await office.enqueue(body, 'cleared', { webhookId })
    await until(() => isDead)
    office.answer = () => false
    office.sender()
    await office.clock.advance(30_000)
    await office.atRestBut('sending')
    expect(office.kept.calls).toHaveLength(1)
    await office.pass(31_000)
    await killed.stop()
    const [first] = await office.rows()
    expect(first?.outcomes).toEqual(['unknown', 'sent'])
    expect(office.kept.calls.map(({ headers }) => headers['webhook-id'] === first?.id).reverse()).toEqual([
      true,
      true,
      false,
    ])
    expect(
      bodiesSaid()
        .map(({ type, data }) => [type, data.repeat ?? null])
        .reverse(),
    ).toEqual([
      ['incident.raised', null],
      ['incident.raised', REPEAT_SENTENCE],
      ['incident.cleared', null],
    ])
  })

  it('beside another one sends nothing twice, and each line in order', async () => {
    const webhooks = await Promise.all(Array.from({ length: 4 }, () => office.webhook()))
    office.sender()
    office.sender()
    const body = await office.incident()
    const kinds = ['raised', 'graver', 'next', 'taken', 'cleared', 'resolved'] as const
    await Promise.all(
      webhooks.map(async (webhookId) => {
        for (const kind of kinds) await office.enqueue(body, kind, { webhookId })
      }),
    )
    await office.atRest()
    const rows = await office.rows()
    const ids = office.kept.calls.map(({ headers }) => headers['webhook-id']).reverse()
    expect(ids).toHaveLength(24)
    for (const webhookId of webhooks) {
      const line = rows.filter((row) => row.line.endsWith(webhookId))
      expect(line.map(({ kind }) => kind)).toEqual(kinds)
      expect(ids.filter((id) => line.some((row) => row.id === id))).toEqual(line.map(({ id }) => id))
    }
  })
})

/** As a restart of the database ends them, but for the test's own. */
async function endConnections(url: string): Promise<void> {
  const client = new pg.Client({ connectionString: url })
  await client.connect()
  await client.query(
    `select pg_terminate_backend(pid) from pg_stat_activity where datname = current_database() and pid <> pg_backend_pid()`,
  )
  await client.end()
}
