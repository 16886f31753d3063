import { randomBytes } from 'node:crypto'
import { POST as enrolRoute } from '@/app/api/agent/enrol/route'
import { POST as reportRoute } from '@/app/api/agent/report/route'
import { POST as sessionRoute } from '@/app/api/agent/session/route'
import { JoiningCodeSchema, type Overlay, OverlaySchema } from '@/entities'
import { hashJoiningCode, newJoiningCode } from '@/lib/auth/secrets'
import type { Incoming } from '@/lib/collector/ingest-entry'
import { newSigningKey } from '@/lib/data/overlays'
import type { RouteHandler } from '@/lib/http/route'
import {
  enrolReplySchema,
  enrolText,
  generateKeys,
  type KeyPair,
  type ReportReply,
  reportReplySchema,
  sessionReplySchema,
  sessionText,
  signText,
} from '@/lib/protocol'
import type { TestDatabase } from './database'

export async function seedOverlay(
  database: TestDatabase,
  teamId: string,
  init: Pick<Overlay, 'slug'> & Partial<Pick<Overlay, 'pace' | 'disclosure'>>,
): Promise<{ id: string; slug: string }> {
  const em = database.orm.em.fork()
  const overlay = em.create(OverlaySchema, {
    team: teamId,
    name: init.slug,
    pace: 'drill',
    disclosure: 'named',
    weights: 'unit',
    createdAt: new Date(),
    ...init,
    ...newSigningKey(),
  })
  await em.flush()
  return { id: overlay.id, slug: overlay.slug }
}

export async function seedCode(
  database: TestDatabase,
  overlayId: string,
  init: { uses?: number; expiresAt?: Date; revokedAt?: Date } = {},
): Promise<string> {
  const em = database.orm.em.fork()
  const code = newJoiningCode()
  em.create(JoiningCodeSchema, {
    overlay: overlayId,
    hash: hashJoiningCode(code),
    hint: code.slice(0, 5),
    uses: init.uses ?? 1,
    expiresAt: init.expiresAt ?? new Date(Date.now() + 3_600_000),
    revokedAt: init.revokedAt ?? null,
    createdAt: new Date(),
  })
  await em.flush()
  return code
}

export function call(
  handler: RouteHandler,
  body: unknown,
  headers: Record<string, string> = {},
): Promise<Response> {
  return handler(
    new Request('http://thinspan.test/api/agent', {
      method: 'POST',
      headers: { 'content-type': 'application/json', ...headers },
      body: typeof body === 'string' ? body : JSON.stringify(body),
    }),
    { params: Promise.resolve({}) },
  )
}

/** Any method, as a caller with a bearer token. */
export function ask(
  handler: RouteHandler,
  method: string,
  init: {
    bearer?: string
    params?: Record<string, string>
    body?: unknown
    query?: string
    headers?: object
  } = {},
): Promise<Response> {
  const { bearer, params = {}, body, query = '', headers = {} } = init
  return handler(
    new Request(`http://thinspan.test/api/${query}`, {
      method,
      headers: {
        ...(bearer === undefined ? {} : { authorization: `Bearer ${bearer}` }),
        ...(body === undefined ? {} : { 'content-type': 'application/json' }),
        ...headers,
      },
      ...(body === undefined ? {} : { body: typeof body === 'string' ? body : JSON.stringify(body) }),
    }),
    { params: Promise.resolve(params) },
  )
}

/** Status and code of a problem, or status alone. */
export async function problemOf(response: Response): Promise<[number, string | undefined]> {
  const body: { code?: string } = await response
    .clone()
    .json()
    .catch(() => ({}))
  return [response.status, body.code]
}

export const enrolBody = (code: string, name: string, keys: KeyPair, over: object = {}) => ({
  code,
  name,
  publicKey: keys.publicKey,
  labels: {},
  address: null,
  version: '0.1.0',
  signature: signText(keys.privateKey, enrolText({ code, name, publicKey: keys.publicKey })),
  ...over,
})

export const sessionBody = (agentId: string, keys: KeyPair, at = new Date(), over: object = {}) => {
  const nonce = randomBytes(16).toString('base64url')
  const text = sessionText({ agentId, at: at.toISOString(), nonce })
  return { agentId, at: at.toISOString(), nonce, signature: signText(keys.privateKey, text), ...over }
}

export interface Member {
  agentId: string
  name: string
  keys: KeyPair
  token: string
}

/** Enrols and opens a session, as an agent does. */
export async function joinAgent(
  code: string,
  name: string,
  labels: Record<string, string> = {},
  over: { node?: string; host?: string; address?: string } = {},
): Promise<Member> {
  const keys = generateKeys()
  const enrolled = await call(enrolRoute, enrolBody(code, name, keys, { labels, ...over }))
  const { agentId } = enrolReplySchema.parse(await enrolled.json())
  const opened = await call(sessionRoute, sessionBody(agentId, keys, new Date(), over))
  const { token } = sessionReplySchema.parse(await opened.json())
  return { agentId, name, keys, token }
}

export function sendReport(member: Pick<Member, 'token'>, report: unknown): Promise<Response> {
  return call(reportRoute, report, { authorization: `Bearer ${member.token}` })
}

export async function deliver(member: Pick<Member, 'token'>, report: Incoming): Promise<ReportReply> {
  const response = await sendReport(member, report)
  return reportReplySchema.parse(await response.json())
}
