import { describe, expect, it } from 'vitest'
import { smtpAnswer } from '@/lib/notify/email'
import { type Answer, plainAnswer } from '@/lib/notify/letter'
import { isReachable, readPrivateAllowed } from '@/lib/notify/public-address'
import { nextDelayMs, PERSON_DELAYS_MS, WEBHOOK_DELAYS_MS } from '@/lib/notify/schedule'
import { outcomeOf } from '@/lib/notify/sender'
import { smsAnswer } from '@/lib/notify/sms'
import { webhookAnswer } from '@/lib/notify/webhook'

const error = (facts: object) => Object.assign(new Error('it failed'), facts)

describe('what a failed mail means', () => {
  const table: [string, object, boolean, Answer['outcome']][] = [
    ['no connection: again', { code: 'ESOCKET', command: 'CONN' }, false, 'again'],
    ['silence before the mail was said: again', { code: 'ETIMEDOUT', command: 'CONN' }, false, 'again'],
    [
      'silence after it was said: it may have arrived',
      { code: 'ETIMEDOUT', command: 'CONN' },
      true,
      'unknown',
    ],
    ['mailbox refused: failed', { command: 'RCPT TO', responseCode: 550 }, false, 'failed'],
    ['mailbox busy: again', { command: 'RCPT TO', responseCode: 450 }, false, 'again'],
    ['mail refused: failed', { command: 'DATA', responseCode: 554 }, true, 'failed'],
    ['mail put off: again', { command: 'DATA', responseCode: 451 }, true, 'again'],
    [
      'our sender address refused: again, it is the server’s to set right',
      { command: 'MAIL FROM', responseCode: 550 },
      false,
      'again',
    ],
    [
      'our password refused: again',
      { code: 'EAUTH', command: 'AUTH PLAIN', responseCode: 535 },
      false,
      'again',
    ],
  ]
  it.each(table)('%s', (_name, facts, isTaking, outcome) =>
    expect(smtpAnswer(error(facts), isTaking).outcome).toBe(outcome),
  )
})

describe('what a failed SMS means', () => {
  const table: [string, object, Answer['outcome']][] = [
    ['no connection: again', { code: 'ECONNREFUSED' }, 'again'],
    ['no answer: it may have arrived', { code: 'ECONNABORTED' }, 'unknown'],
    ['number refused: failed', { status: 400, code: 21211 }, 'failed'],
    ['too many: again', { status: 429 }, 'again'],
    ['our credentials refused: again, they are the server’s to set right', { status: 401 }, 'again'],
    ['the service is broken: again', { status: 503 }, 'again'],
  ]
  it.each(table)('%s', (_name, facts, outcome) => expect(smsAnswer(error(facts)).outcome).toBe(outcome))
})

describe('what a program answers', () => {
  const at = new Date('2026-12-02T04:00:00Z')
  const answer = (status: number, retryAfter: string | null = null) =>
    webhookAnswer({ status, retryAfter, text: '' }, at)
  it('is success from 200 to 299 only', () => {
    const outcomes = [199, 200, 204, 299, 301, 404, 410, 429, 500, 502].map(
      (status) => answer(status).outcome,
    )
    expect(outcomes).toEqual([
      'again',
      'sent',
      'sent',
      'sent',
      'again',
      'again',
      'failed',
      'again',
      'again',
      'again',
    ])
  })
  it('may ask for time, in seconds or as a date', () => {
    expect(answer(503, '120').retryAfterMs).toBe(120_000)
    expect(answer(503, 'Wed, 02 Dec 2026 04:01:00 GMT').retryAfterMs).toBe(60_000)
    expect(answer(503, 'soon').retryAfterMs).toBeUndefined()
  })
  it('goes into tables as one short line', () => {
    expect(plainAnswer(`a\r\n\u0000b\u202e ${'c'.repeat(900)}`)).toBe(`a b ${'c'.repeat(496)}`)
  })
})

describe('the schedule', () => {
  const waited = (delays: readonly number[]) => delays.reduce((sum, ms) => sum + ms, 0) / 3_600_000
  it('lasts a day for people and three for programs', () => {
    expect(waited(PERSON_DELAYS_MS)).toBeCloseTo(24.1, 1)
    expect(waited(WEBHOOK_DELAYS_MS)).toBeCloseTo(75.6, 1)
  })
  it('spreads tries by up to a tenth, heeds what the receiver asks for up to a day, and ends', () => {
    expect(nextDelayMs(WEBHOOK_DELAYS_MS, { made: 1, random: 0.5 })).toBe(5_250)
    expect(nextDelayMs(WEBHOOK_DELAYS_MS, { made: 1, random: 0, retryAfterMs: 60_000 })).toBe(60_000)
    expect(nextDelayMs(WEBHOOK_DELAYS_MS, { made: 1, random: 0, retryAfterMs: 1e12 })).toBe(86_400_000)
    expect(nextDelayMs(WEBHOOK_DELAYS_MS, { made: 10, random: 0 })).toBeNull()
  })
  it('tries again what may have arrived, and says when it was the last time', () => {
    const unknown: Answer = { outcome: 'unknown', answer: 'Silence.' }
    const now = { nowMs: 0, random: 0 }
    expect(outcomeOf({ way: 'webhook', tries: 1, isOn: null }, unknown, now)).toEqual({
      answer: unknown,
      state: 'waiting',
      dueAt: new Date(5_000),
    })
    expect(outcomeOf({ way: 'webhook', tries: 10, isOn: null }, unknown, now)).toEqual({
      answer: { outcome: 'unknown', answer: 'Silence. That was the last try: send it again by hand.' },
      state: 'failed',
      dueAt: null,
    })
  })
})

describe('addresses that webhooks may reach', () => {
  const none = readPrivateAllowed('')
  it.each(['93.184.216.34', '1.1.1.1', '172.32.0.1', '2606:2800:220:1::1', '::ffff:93.184.216.34'])(
    '%s',
    (address) => expect(isReachable(address, none)).toBe(true),
  )
  it.each([
    '127.0.0.1',
    '127.9.9.9',
    '0.0.0.0',
    '10.0.0.1',
    '172.16.0.1',
    '172.31.255.255',
    '192.168.1.1',
    '100.64.0.1',
    '169.254.169.254',
    '198.18.0.1',
    '224.0.0.1',
    '255.255.255.255',
    '::',
    '::1',
    'fe80::1',
    'fe80::1%eth0',
    'fc00::1',
    'fd00:ec2::254',
    'ff02::1',
    '::ffff:10.0.0.1',
    '::ffff:a9fe:a9fe',
    '0:0:0:0:0:ffff:7f00:1',
    '64:ff9b::a9fe:a9fe',
    '2002:7f00:1::',
    '2001::1',
    '2001:db8::1',
    'no address',
  ])('but not %s', (address) => expect(isReachable(address, none)).toBe(false))

  it('are more where the operator allows networks, or all', () => {
    const some = readPrivateAllowed('10.1.0.0/16, fd00::/8')
    expect(
      ['10.1.2.3', '::ffff:10.1.2.3', 'fd00::1', '10.2.0.1', '::1'].map((a) => isReachable(a, some)),
    ).toEqual([true, true, true, false, false])
    expect(isReachable('127.0.0.1', readPrivateAllowed('allow'))).toBe(true)
    expect(() => readPrivateAllowed('intranet')).toThrow('THINSPAN_WEBHOOK_PRIVATE')
    expect(() => readPrivateAllowed('10.0.0.0/40')).toThrow('10.0.0.0/40')
  })
})
