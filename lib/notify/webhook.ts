import { Webhook } from 'standardwebhooks'
import { type Answer, type Letter, plainAnswer, type WebhookTarget } from './letter'
import { isReachable, type PrivateAllowed } from './public-address'
import { AddressRefused, type PostAnswer, PostFailed, type PostInit, post } from './webhook-request'
import { REPEAT_SENTENCE } from './wording'

export interface WebhookInit {
  allowed: PrivateAllowed
  /** Scheme, host and port of the one private receiver that is always allowed: the stand-in of `npm start`. */
  alsoOrigin: string | null
  origin: string | null
  resolve?: PostInit['resolve']
}

/** Sends signed requests as Standard Webhooks 1.0 describes them. */
export class WebhookWay {
  readonly #init: WebhookInit

  constructor(init: WebhookInit) {
    this.#init = init
  }

  async send({ url, secrets }: WebhookTarget, letter: Letter, signal: AbortSignal): Promise<Answer> {
    const { allowed, alsoOrigin, origin, resolve } = this.#init
    try {
      const parsed = new URL(url)
      if (parsed.protocol !== 'https:' && parsed.protocol !== 'http:')
        return { outcome: 'failed', answer: 'The address must begin with https:// or http://.' }
      const body = JSON.stringify(payloadOf(letter, origin))
      const headers = { ...signedHeaders(letter, body, secrets), 'content-type': 'application/json' }
      const isStandIn = parsed.origin === alsoOrigin
      const mayReach = (address: string) => isStandIn || isReachable(address, allowed)
      return webhookAnswer(await post({ url: parsed, headers, body, mayReach, resolve }, signal), letter.at)
    } catch (error) {
      return failureAnswer(error, signal.aborted)
    }
  }
}

/** Types are lower-case words with full stops, as the standard recommends. */
export function payloadOf(letter: Letter, origin: string | null) {
  const { kind, body, mayBeRepeat } = letter
  const { at, incident, ...facts } = body
  return {
    type: kind === 'test' ? 'test' : `incident.${kind}`,
    timestamp: at,
    data: {
      incident: incident && {
        ...incident,
        url: origin ? `${origin}/incidents/${incident.number}` : null,
      },
      ...facts,
      ...(mayBeRepeat ? { repeat: REPEAT_SENTENCE } : {}),
    },
  }
}

/** Every secret signs the same id, time of this attempt and body. */
export function signedHeaders(
  { id, at }: Pick<Letter, 'id' | 'at'>,
  body: string,
  secrets: readonly string[],
): Record<string, string> {
  const signatures = secrets.map((secret) => new Webhook(secret).sign(id, at, body))
  return {
    'webhook-id': id,
    'webhook-timestamp': String(Math.floor(at.getTime() / 1000)),
    'webhook-signature': signatures.join(' '),
  }
}

export function webhookAnswer({ status, retryAfter, text }: PostAnswer, at: Date): Answer {
  const said = plainAnswer(`HTTP ${status}. ${text}`)
  if (status >= 200 && status < 300) return { outcome: 'sent', answer: said }
  if (status === 410)
    return {
      outcome: 'failed',
      isGone: true,
      answer: 'The receiver answered 410 Gone: it wants nothing more, so this webhook was turned off.',
    }
  if (status >= 300 && status < 400)
    return { outcome: 'again', answer: `HTTP ${status}: redirects are not followed. Enter the new address.` }
  return { outcome: 'again', answer: said, retryAfterMs: retryAfterMs(retryAfter, at) }
}

/** RFC 9110, 10.2.3: seconds, or a date. */
function retryAfterMs(header: string | null, at: Date): number | undefined {
  if (header === null) return undefined
  if (/^\d{1,9}$/.test(header)) return Number(header) * 1000
  const dateMs = Date.parse(header)
  return Number.isNaN(dateMs) ? undefined : Math.max(0, dateMs - at.getTime())
}

function failureAnswer(error: unknown, isLate: boolean): Answer {
  // It may be allowed, or lead elsewhere, by the next try.
  if (error instanceof AddressRefused) return { outcome: 'again', answer: error.message }
  if (error instanceof PostFailed) {
    const why = isLate ? 'There was no answer in time.' : `${plainAnswer(error.reason.message)}.`
    return error.hasLeft
      ? { outcome: 'unknown', answer: `${why} It may have arrived.` }
      : { outcome: 'again', answer: why }
  }
  const reason = error instanceof Error ? error.message : String(error)
  return { outcome: 'failed', answer: plainAnswer(`The address or the secret cannot be used: ${reason}`) }
}
