import { expect, test } from 'vitest'
import { generateKeys, PASS_CLOCK_TOLERANCE_SECONDS, signPass, verifyPass } from '@/lib/protocol'
import { NOW_SECONDS, OVERLAY_ID } from '../support/passes'

const overlay = generateKeys()
const agent = generateKeys()
const claims = {
  overlayId: OVERLAY_ID,
  agentId: 'agent-tar-01',
  name: 'tar-01',
  key: agent.publicKey,
  issuedAt: NOW_SECONDS,
  expiresAt: NOW_SECONDS + 86_400,
}
const at = (seconds: number) => new Date(seconds * 1000)
const judge = (token: string, seconds = NOW_SECONDS, key = overlay.publicKey, id = OVERLAY_ID) =>
  verifyPass(token, key, id, at(seconds))

test('a pass says what the collector signed', async () => {
  expect(await judge(await signPass(overlay.privateKey, claims))).toEqual({ ok: true, claims })
})

test('a pass is good until its expiry and the tolerance for clocks, then expired', async () => {
  const token = await signPass(overlay.privateKey, claims)
  const last = claims.expiresAt + PASS_CLOCK_TOLERANCE_SECONDS
  expect(await judge(token, last - 1)).toMatchObject({ ok: true })
  expect(await judge(token, last)).toEqual({
    ok: false,
    error: { code: 'pass-expired', expiredAt: claims.expiresAt },
  })
})

test('a pass for another overlay is told apart from a forged one', async () => {
  const token = await signPass(generateKeys().privateKey, { ...claims, overlayId: 'overlay-elsewhere' })
  expect(await judge(token)).toEqual({
    ok: false,
    error: { code: 'pass-of-another-overlay', overlayId: 'overlay-elsewhere' },
  })
})

test('a pass signed with another key is invalid', async () => {
  expect(await judge(await signPass(generateKeys().privateKey, claims))).toEqual({
    ok: false,
    error: { code: 'pass-invalid', reason: 'ERR_JWS_SIGNATURE_VERIFICATION_FAILED' },
  })
})

test('changed claims, an unsigned token and things that are no token are invalid', async () => {
  const [header, , signature] = (await signPass(overlay.privateKey, claims)).split('.')
  const base64url = (value: object) => Buffer.from(JSON.stringify(value)).toString('base64url')
  const body = {
    iss: 'thinspan',
    aud: OVERLAY_ID,
    sub: 'agent-eel-09',
    iat: NOW_SECONDS,
    exp: NOW_SECONDS + 9,
  }
  const tokens = [
    `${header}.${base64url(body)}.${signature}`,
    `${base64url({ alg: 'none' })}.${base64url(body)}.`,
    '',
    'a.b.c',
    'x'.repeat(5_000),
  ]
  for (const token of tokens) {
    expect(await judge(token)).toMatchObject({ ok: false, error: { code: 'pass-invalid' } })
  }
})
