import type { z } from 'zod'
import { CallOrderSchema, type Webhook, WebhookSchema } from '@/entities'
import { newWebhookSecret } from '@/lib/auth/secrets'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { lockTeam, teamMeant } from './teams'
import { assertNameFree, missing, usedIn } from './telling-checks'
import type { newWebhookSchema, Webhook as WebhookDto, WebhookSecret } from './telling-dto'

const MOST_WEBHOOKS = 20
const UNROTATED = { previousSecret: null, previousUntil: null, disabledAt: null, disabledBecause: null }

/** So long the secret before signs beside the new one. */
export const BOTH_SIGN_MS = 24 * 60 * 60 * 1000

export async function listWebhooks(call: Call, teamSlug?: string): Promise<WebhookDto[]> {
  const team = teamMeant(call, teamSlug)
  authorise(call, 'webhook.list', team.teamId)
  const webhooks = await call.em.find(WebhookSchema, { team: team.teamId }, { orderBy: { name: 'asc' } })
  return webhooks.map((webhook) => toDto(webhook, call.now))
}

/** The only moment at which the secret is seen, but for a rotation. */
export async function addWebhook(
  call: Call,
  { team: slug, name, url }: z.output<typeof newWebhookSchema> & { team?: string },
): Promise<WebhookSecret> {
  const { em, now } = call
  const team = teamMeant(call, slug)
  // What follows the host may be a secret of the receiver's.
  call.note({ subject: name, data: { added: true, host: new URL(url).host } })
  authorise(call, 'webhook.change', team.teamId)
  await lockTeam(em, team.teamId)
  await assertNameFree(em, WebhookSchema, { teamId: team.teamId, name, id: null })
  if ((await em.count(WebhookSchema, { team: team.teamId })) >= MOST_WEBHOOKS)
    throw new AppError('invalid-input', `The team has ${MOST_WEBHOOKS} webhooks; remove one first.`)
  const secret = newWebhookSecret()
  em.create(WebhookSchema, { team: team.teamId, name, url, secret, ...UNROTATED, createdAt: now })
  await em.flush()
  return { name, secret }
}

/** A new secret; both sign for a while, so that the receiver can be changed without a pause. */
export async function rotateWebhook(call: Call, id: string): Promise<WebhookSecret> {
  const webhook = await webhookMeant(call, id)
  call.note({ data: { rotated: true } })
  webhook.previousSecret = webhook.secret
  webhook.previousUntil = new Date(call.now.getTime() + BOTH_SIGN_MS)
  webhook.secret = newWebhookSecret()
  await call.em.flush()
  return { name: webhook.name, secret: webhook.secret }
}

/** After the receiver has said that it is gone. */
export async function enableWebhook(call: Call, id: string): Promise<void> {
  const webhook = await webhookMeant(call, id)
  call.note({ data: { enabled: true } })
  webhook.disabledAt = null
  webhook.disabledBecause = null
  await call.em.flush()
}

/** Refused while a call order names it. */
export async function removeWebhook(call: Call, id: string): Promise<void> {
  const webhook = await webhookMeant(call, id)
  call.note({ data: { removed: true } })
  const using = usedIn(await call.em.find(CallOrderSchema, { team: webhook.team.id }), 'webhookIds', id)
  if (using) throw new AppError('in-use', `${using} “${webhook.name}”. Take it out there first.`)
  await call.em.removeAndFlush(webhook)
}

async function webhookMeant(call: Call, id: string): Promise<Webhook> {
  const found = await call.em.findOne(WebhookSchema, { id })
  if (!found) throw missing('webhook')
  authorise(call, 'webhook.change', found.team.id)
  call.note({ subject: found.name })
  await lockTeam(call.em, found.team.id)
  const webhook = await call.em.findOne(WebhookSchema, { id }, { refresh: true })
  if (!webhook) throw missing('webhook')
  return webhook
}

function toDto(webhook: Webhook, now: Date): WebhookDto {
  const { id, name, url, previousUntil, disabledAt, disabledBecause, createdAt } = webhook
  return {
    id,
    name,
    url,
    previousUntil: previousUntil && previousUntil > now ? previousUntil.toISOString() : null,
    disabledAt: disabledAt?.toISOString() ?? null,
    disabledBecause: disabledBecause ?? null,
    createdAt: createdAt.toISOString(),
  }
}
