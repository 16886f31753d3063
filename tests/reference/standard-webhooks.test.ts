import { Webhook } from 'standardwebhooks'
import { describe, expect, it } from 'vitest'
import { WEBHOOK_DELAYS_MS } from '@/lib/notify/schedule'
import { signedHeaders } from '@/lib/notify/webhook'

describe('what Standard Webhooks 1.0 publishes', () => {
  /**
   * The vector of "sign function works" in libraries/javascript/src/webhook.test.ts of
   * github.com/standard-webhooks/standard-webhooks (read at commit 10d3e46), worked out below by another implementation too.
   */
  const secret = 'whsec_MfKQ9r8GKYqrTwjUPD8ILPZIo2LaLaSw'
  const id = 'msg_p5jXN8AQM9LWM0D4loKWxJek'
  const at = new Date(1614265330 * 1000)
  const payload = '{"test": 2432232314}'
  const signature = 'v1,g0hM9SsE+OTPJTGt/tmIKtSyZlE3uFJELVlNIOLJ1OE='

  it('is the signature we send', () => {
    expect(signedHeaders({ id, at }, payload, [secret])).toEqual({
      'webhook-id': id,
      'webhook-timestamp': '1614265330',
      'webhook-signature': signature,
    })
  })

  it('is base64 of HMAC-SHA256 over id, seconds and body, with the decoded secret as the key', async () => {
    const { createHmac } = await import('node:crypto')
    const key = Buffer.from(secret.slice('whsec_'.length), 'base64')
    const hmac = createHmac('sha256', key).update(`${id}.1614265330.${payload}`).digest('base64')
    expect(`v1,${hmac}`).toBe(signature)
  })

  it('lets either secret be checked while one replaces the other', () => {
    const [first, second] = ['whsec_AAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAA', secret]
    const now = new Date()
    const headers = signedHeaders({ id, at: now }, payload, [first, second])
    for (const one of [first, second])
      expect(new Webhook(one).verify(payload, headers)).toEqual({ test: 2432232314 })
    const stranger = new Webhook('whsec_BBBBBBBBBBBBBBBBBBBBBBBBBBBBBBBB')
    expect(() => stranger.verify(payload, headers)).toThrow('No matching signature')
  })

  it('is the schedule we keep: its times since the start, spec/standard-webhooks.md, "Deliverability and reliability"', () => {
    const sinceStart = [
      '00:00:00',
      '00:00:05',
      '00:05:05',
      '00:35:05',
      '02:35:05',
      '07:35:05',
      '17:35:05',
      '31:35:05',
      '51:35:05',
      '75:35:05',
    ]
    let seconds = 0
    const ours = WEBHOOK_DELAYS_MS.map((delayMs) => {
      seconds += delayMs / 1000
      const parts = [Math.floor(seconds / 3600), Math.floor(seconds / 60) % 60, seconds % 60]
      return parts.map((part) => String(part).padStart(2, '0')).join(':')
    })
    expect(ours).toEqual(sinceStart)
  })
})
