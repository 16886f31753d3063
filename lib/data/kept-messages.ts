import { Webhook } from 'standardwebhooks'
import { z } from 'zod'
import { WebhookSchema } from '@/entities'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { callerTeams } from './teams'

const keptSchema = z.object({
  mails: z.array(
    z.object({
      at: z.string(),
      from: z.string(),
      to: z.array(z.string()),
      subject: z.string(),
      text: z.string(),
      html: z.string(),
    }),
  ),
  texts: z.array(z.object({ at: z.string(), from: z.string(), to: z.string(), text: z.string() })),
  calls: z.array(
    z.object({
      at: z.string(),
      path: z.string(),
      headers: z.record(z.string(), z.string()),
      body: z.string(),
      status: z.number(),
    }),
  ),
})
type Kept = z.infer<typeof keptSchema>

export interface KeptMessages {
  mails: Kept['mails']
  texts: Kept['texts']
  calls: (Omit<Kept['calls'][number], 'headers'> & {
    id: string
    /** The webhook of the caller's teams whose secret signed it; null for none. */
    signedAs: string | null
  })[]
}

export interface KeptComponents {
  fetch(url: string): Promise<Response>
}

/** What the stand-ins on this machine were sent in place of people and programs; newest first. */
export async function listKeptMessages(
  call: Call,
  { fetch }: KeptComponents,
  fakesUrl: string | undefined,
): Promise<KeptMessages> {
  authorise(call, 'kept-message.list')
  if (!fakesUrl) throw new AppError('not-found', 'There is nothing here. Check the address.')
  const answer = await fetch(`${fakesUrl}/kept`).catch(() => null)
  if (!answer?.ok)
    throw new AppError(
      'unavailable',
      'The stand-ins for mail and SMS do not answer. Stop Thinspan and start it again.',
    )
  const { mails, texts, calls } = keptSchema.parse(await answer.json())
  const teams = callerTeams(call).map(({ teamId }) => teamId)
  const webhooks = await call.em.find(WebhookSchema, { team: { $in: teams } })
  return {
    mails,
    texts,
    calls: calls.map(({ headers, ...rest }) => ({
      ...rest,
      id: headers['webhook-id'] ?? '',
      signedAs: webhooks.find(({ secret }) => isSignedBy(secret, headers, rest.body))?.name ?? null,
    })),
  }
}

/** As a receiver checks it, but for the age: what is kept grows old. */
function isSignedBy(secret: string, headers: Record<string, string>, body: string): boolean {
  const at = new Date(Number(headers['webhook-timestamp']) * 1000)
  const expected = new Webhook(secret).sign(headers['webhook-id'] ?? '', at, body)
  return (headers['webhook-signature'] ?? '').split(' ').includes(expected)
}
