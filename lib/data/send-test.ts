import { z } from 'zod'
import { ChannelSchema, WebhookSchema } from '@/entities'
import { query } from '@/lib/collector/query'
import { notify } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { lineOf, OUTBOX_CHANNEL, put } from '@/lib/notify/outbox'
import { callerTeams, teamMeant } from './teams'

/** A button pressed again and again must not cost an SMS each time. */
export const TEST_EVERY_SECONDS = 20

/** Sends a test to one of the caller's own channels. @returns the message, as the delivery log knows it */
export async function testChannel(call: Call, channelId: string): Promise<{ id: string }> {
  authorise(call, 'channel.test')
  const userId = call.caller.kind === 'user' ? call.caller.userId : null
  const channel =
    userId !== null && z.uuid().safeParse(channelId).success
      ? await call.em.findOne(ChannelSchema, { id: channelId, user: userId })
      : null
  if (!channel) throw new AppError('not-found', 'You have no such channel. Load the page again.')
  if (!channel.isOn) throw new AppError('not-failed', 'This channel is turned off. Turn it on first.')
  const { teamId, slug, name } = teamMeant(call, undefined)
  call.note({ teamId, subject: `${channel.kind} ${channel.address}` })
  return send(call, { teamId, slug, name }, { channelId: channel.id, webhookId: null })
}

/** The same for a webhook of one of the caller's teams. */
export async function testWebhook(call: Call, webhookId: string): Promise<{ id: string }> {
  const webhook = z.uuid().safeParse(webhookId).success
    ? await call.em.findOne(WebhookSchema, { id: webhookId })
    : null
  const team = callerTeams(call).find(({ teamId }) => teamId === webhook?.team.id)
  if (!webhook || !team) throw new AppError('not-found', 'There is no such webhook. Load the page again.')
  authorise(call, 'webhook.test', team.teamId)
  call.note({ subject: webhook.name })
  return send(call, team, { channelId: null, webhookId: webhook.id })
}

async function send(
  { em, now }: Call,
  { teamId, slug, name }: { teamId: string; slug: string; name: string },
  to: { channelId: string | null; webhookId: string | null },
): Promise<{ id: string }> {
  const line = lineOf(null, to.channelId ?? to.webhookId ?? '')
  const since = new Date(now.getTime() - TEST_EVERY_SECONDS * 1000)
  const [recent] = await query(
    em,
    `select 1 from outbox where line = ? and (created_at > ? or state in ('waiting', 'sending')) limit 1`,
    [line, since],
  )
  if (recent)
    throw new AppError(
      'throttled',
      'A test is on its way, or was just sent. Look at the delivery log first.',
      {
        retryAfterSeconds: TEST_EVERY_SECONDS,
      },
    )
  const body = {
    at: now.toISOString(),
    incident: null,
    overlay: null,
    team: { slug, name },
    because: 'Somebody asked for it on the Telling page.',
    details: [],
    holder: null,
  }
  const id = await put(em, { kind: 'test', body, incidentId: null, teamId }, { ...to, quiet: null }, now)
  await notify(em, OUTBOX_CHANNEL, '')
  return { id }
}
