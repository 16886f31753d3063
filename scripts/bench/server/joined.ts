import { generateKeyPairSync, randomBytes } from 'node:crypto'
import { hashJoiningCode, newJoiningCode } from '@/lib/auth/secrets'
import type { PaceName } from '@/lib/method/pace'
import {
  enrolReplySchema,
  enrolText,
  generateKeys,
  sessionReplySchema,
  sessionText,
  signText,
} from '@/lib/protocol'
import type { BenchDatabase } from './bench-database'

export interface JoinedAgent {
  agentId: string
  name: string
  token: string
}

const AT_ONCE = 16

/** An overlay with a joining code for so many agents. @returns its id and the code */
export async function makeOverlay(
  database: BenchDatabase,
  init: { slug: string; pace: PaceName; agents: number },
): Promise<{ overlayId: string; code: string }> {
  const [team] = await database.query<{ id: string }>(
    `insert into teams (slug, name, created_at) values ('harbourline', 'Harbourline', now())
     on conflict (slug) do update set name = excluded.name returning id`,
  )
  const { x, d } = generateKeyPairSync('ed25519').privateKey.export({ format: 'jwk' })
  const [overlay] = await database.query<{ id: string }>(
    `insert into overlays (team_id, slug, name, pace, disclosure, weights, public_key, private_key, created_at)
     values ($1, $2, $2, $3, 'named', 'unit', $4, $5, now()) returning id`,
    [team?.id, init.slug, init.pace, x, d],
  )
  const code = newJoiningCode()
  await database.query(
    `insert into joining_codes (overlay_id, hash, hint, uses, expires_at, created_at)
     values ($1, $2, '', $3, now() + interval '1 day', now())`,
    [overlay?.id, hashJoiningCode(code), init.agents],
  )
  return { overlayId: overlay?.id ?? '', code }
}

/** Enrols agents and opens a session for each, as agents do, with keys of their own. */
export async function joinAll(url: string, code: string, names: readonly string[]): Promise<JoinedAgent[]> {
  const joined: JoinedAgent[] = []
  for (let from = 0; from < names.length; from += AT_ONCE)
    joined.push(
      ...(await Promise.all(names.slice(from, from + AT_ONCE).map((name) => joinOne(url, code, name)))),
    )
  return joined
}

async function joinOne(url: string, code: string, name: string): Promise<JoinedAgent> {
  const { privateKey, publicKey } = generateKeys()
  const { agentId } = enrolReplySchema.parse(
    await post(`${url}/api/agent/enrol`, {
      code,
      name,
      publicKey,
      labels: {},
      address: null,
      version: '0.1.0',
      signature: signText(privateKey, enrolText({ code, name, publicKey })),
    }),
  )
  const proof = { agentId, at: new Date().toISOString(), nonce: randomBytes(16).toString('base64url') }
  const { token } = sessionReplySchema.parse(
    await post(`${url}/api/agent/session`, { ...proof, signature: signText(privateKey, sessionText(proof)) }),
  )
  return { agentId, name, token }
}

async function post(url: string, body: object): Promise<unknown> {
  const response = await fetch(url, {
    method: 'POST',
    headers: { 'content-type': 'application/json' },
    body: JSON.stringify(body),
  })
  const answer: unknown = await response.json()
  if (!response.ok) throw new Error(`${url} answered ${response.status}: ${JSON.stringify(answer)}`)
  return answer
}
