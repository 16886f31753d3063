import { Webhook } from 'standardwebhooks'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { sql } from '@/lib/db'
import type { Answer } from '@/lib/notify/letter'
import { type FakeSmtp, SMTP_ANSWER, startFakeSmtp } from '@/scripts/fakes/index'
import { PostOffice, WEBHOOK_SECRET } from '../support/post-office'

let office: PostOffice
let smtp: FakeSmtp
beforeAll(async () => {
  office = await PostOffice.open()
  smtp = await startFakeSmtp(
    { kept: office.kept, now: () => office.now() },
    {
      options: {
        onRcptTo: ({ address }, _session, callback) =>
          address.startsWith('nobody@')
            ? callback(Object.assign(new Error('5.1.1 No such mailbox'), { responseCode: 550 }))
            : callback(),
      },
    },
  )
})
afterAll(async () => {
  await office.close()
  await smtp.stop()
})
beforeEach(() => office.clear())

describe('a message to a person', () => {
  it('is a mail in text and HTML of the same content, in one thread with the others of its incident', async () => {
    await office.channel('email', 'owner@harbourline.example')
    const body = await office.incident('urgent')
    const number = body.incident?.number
    office.sender({ settings: { THINSPAN_SMTP_URL: smtp.url } })
    await office.enqueue(body, 'raised')
    const later = {
      ...body,
      incident: { ...body.incident!, sentence: 'Two links < 3 still hold Eelholm.' },
      holder: 'Ines',
    }
    await office.enqueue(later, 'taken')
    await office.atRest()

    const [second, first] = office.kept.mails
    expect(first).toMatchObject({
      from: 'thinspan@harbourline.example',
      to: ['owner@harbourline.example'],
      subject: `[Thinspan] Incident ${number}, Tideline: Three links still hold Eelholm to the rest.`,
    })
    expect(first?.text).toBe(
      [
        'New incident.',
        'Three links still hold Eelholm to the rest.',
        'gul-04 – eel-09 carries 61 % of what holds.',
        'It is your week.',
        [
          `incident: ${number}, urgent`,
          'raised: 2 Dec 2026 04:00 UTC',
          'who has it: nobody',
          'overlay: Tideline',
          'team: Harbourline',
          'written: 2 Dec 2026 04:00 UTC',
        ].join('\n'),
        `Open it to see what is known and to say that you have it; that needs your sign-in.\nhttps://thinspan.harbourline.example/incidents/${number}`,
        'A warning can be late or missing. It is never the only safeguard where an outage can hurt people.',
      ].join('\n\n'),
    )
    const spoken = (text: string) =>
      text
        .replace(/<[^>]*>/g, ' ')
        .replaceAll('&lt;', '<')
        .replace(/[\s:]+/g, ' ')
        .trim()
    expect(spoken(first!.html)).toBe(spoken(first!.text))
    expect(spoken(second!.html)).toBe(spoken(second!.text.replaceAll('<', '&lt;')))
    expect(second?.text).toContain('Ines has it.')
    expect(second?.subject).toBe(first?.subject)
    const rows = await office.rows()
    expect([first?.messageId, second?.messageId]).toEqual(rows.map(({ id }) => `<${id}@harbourline.example>`))
    expect(first?.references).toEqual([`<incident-${body.incident?.id}@harbourline.example>`])
    expect(second?.references).toEqual(first?.references)
    expect(rows.map(({ state, answers }) => [state, answers])).toEqual([
      ['sent', [`250 ${SMTP_ANSWER}`]],
      ['sent', [`250 ${SMTP_ANSWER}`]],
    ])
  })

  it('is a short message through the SDK of the SMS service', async () => {
    await office.channel('sms', '+12025550111')
    const body = await office.incident('urgent')
    office.sender()
    await office.enqueue(body, 'raised')
    await office.atRest()
    const number = body.incident?.number
    expect(office.kept.texts).toMatchObject([
      {
        from: '+12025550100',
        to: '+12025550111',
        text: `Thinspan ${number} URGENT Tideline: Three links still hold Eelholm to the rest. https://thinspan.harbourline.example/incidents/${number}`,
      },
    ])
  })

  it('fails at once where the number or the mailbox does not exist, with what the other side said', async () => {
    await office.channel('sms', '+12025550000')
    await office.channel('email', 'nobody@harbourline.example')
    office.sender({ settings: { THINSPAN_SMTP_URL: smtp.url } })
    await office.enqueue(await office.incident('urgent'), 'raised')
    await office.atRest()
    const rows = await office.rows()
    expect(rows.map(({ state, attempts }) => [state, attempts])).toEqual([
      ['failed', 1],
      ['failed', 1],
    ])
    expect(rows.flatMap(({ answers }) => answers).sort()).toEqual([
      '550 5.1.1 No such mailbox',
      "HTTP 400, 21211: The 'To' number is not valid.",
    ])
  })

  it('says in the log what is missing where a way is not set up, once others have had a minute for it', async () => {
    await office.channel('email', 'owner@harbourline.example')
    office.sender({ settings: { THINSPAN_MAIL_FROM: '' } })
    await office.enqueue(await office.incident('urgent'), 'raised')
    await office.clock.advance(59_000)
    expect((await office.rows()).map(({ state }) => state)).toEqual(['waiting'])
    await office.clock.advance(2_000)
    await office.atRest()
    expect((await office.rows()).map(({ state, answers }) => [state, answers])).toEqual([
      [
        'failed',
        [
          'E-mail is not set up on this server: set THINSPAN_SMTP_URL and THINSPAN_MAIL_FROM, start it again, and send this again by hand.',
        ],
      ],
    ])
  })

  it('is dropped, and says so, where the channel was turned off meanwhile', async () => {
    const id = await office.channel('sms', '+12025550111')
    await office.enqueue(await office.incident('urgent'), 'raised')
    await sql(office.em(), 'update channels set is_on = false where id = ?', [id])
    office.sender()
    await office.atRest()
    expect((await office.rows()).map(({ state, answers }) => [state, answers])).toEqual([
      ['dropped', ['Not sent: the channel was turned off before its time came.']],
    ])
    expect(office.kept.texts).toEqual([])
  })
})

describe('a message to a program', () => {
  it('is signed by each secret in force, with the time of the attempt', async () => {
    const previousSecret = 'whsec_AAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAA'
    const previousUntil = new Date(office.now().getTime() + 3_600_000)
    const webhookId = await office.webhook(undefined, { previousSecret, previousUntil })
    const body = await office.incident('urgent')
    office.sender()
    await office.enqueue(body, 'raised', { webhookId })
    await office.atRest()
    const [call] = office.kept.calls
    const [row] = await office.rows()
    expect(JSON.parse(call!.body)).toEqual({
      type: 'incident.raised',
      timestamp: office.now().toISOString(),
      data: {
        incident: {
          ...body.incident,
          url: `https://thinspan.harbourline.example/incidents/${body.incident?.number}`,
        },
        overlay: body.overlay,
        team: body.team,
        because: body.because,
        details: body.details,
        holder: null,
      },
    })
    const at = office.now()
    expect(call?.headers).toMatchObject({
      'content-type': 'application/json',
      'webhook-id': row?.id,
      'webhook-timestamp': String(at.getTime() / 1000),
      'webhook-signature': [WEBHOOK_SECRET, previousSecret]
        .map((secret) => new Webhook(secret).sign(row!.id, at, call!.body))
        .join(' '),
    })
    expect(row).toMatchObject({ state: 'sent', answers: ['HTTP 204.'] })
  })
})

describe('the sign of life', () => {
  const pulseAt = async () =>
    (await sql<{ at: string }>(office.em(), `select at from watch_pulses where what = 'sending'`)).map(
      ({ at }) => new Date(at).toISOString(),
    )

  it('is given while nothing is due, at least every quarter of a minute', async () => {
    office.sender()
    await office.atRest()
    await office.clock.advance(15_000)
    await expect.poll(pulseAt, { timeout: 60_000 }).toEqual([office.now().toISOString()])
  })

  it('is not given while a way of sending hangs beyond every limit', async () => {
    await office.channel('email', 'owner@harbourline.example')
    let release = () => {}
    const hanging = new Promise<Answer>((resolve) => {
      release = () => resolve({ outcome: 'sent', answer: 'At last.' })
    })
    // Neither answers nor ends when it is told to; nothing is abandoned either, as if this process had lost its timers.
    const ways = { ...office.ways(), isSetUp: () => true, email: () => hanging }
    office.sender({ ways }, { answerMs: 10_000_000, leaseMs: 60_000 })
    await office.enqueue(await office.incident('urgent'), 'raised')
    await expect.poll(async () => (await office.rows())[0]?.state, { timeout: 60_000 }).toBe('sending')
    await office.clock.advance(50_000)
    const before = await pulseAt()
    for (let look = 0; look < 8; look++) await office.clock.advance(15_000)
    expect(await pulseAt()).toEqual(before)
    release()
  })
})
