import type twilioSdk from 'twilio'
import { type Answer, type Letter, plainAnswer } from './letter'
import { smsText } from './sms-text'

/** Shorter than an attempt may take, so that the SDK itself says what went wrong. */
const ANSWER_MS = 12_000

export interface SmsInit {
  accountSid: string
  authToken: string
  /** The number messages come from, in E.164 form. */
  from: string
  /** Scheme and host in place of the service's own; null for the service. */
  baseUrl: string | null
  origin: string | null
}

/** Sends through the SMS service's SDK. */
export class SmsWay {
  readonly #init: SmsInit
  #client: Promise<twilioSdk.Twilio> | undefined

  constructor(init: SmsInit) {
    this.#init = init
  }

  async send(number: string, letter: Letter): Promise<Answer> {
    const { from, origin } = this.#init
    try {
      this.#client ??= openClient(this.#init)
      const client = await this.#client
      const { sid, status } = await client.messages.create({
        from,
        to: number,
        body: smsText(letter, origin),
      })
      return { outcome: 'sent', answer: plainAnswer(`Taken as ${sid}, ${status}.`) }
    } catch (error) {
      return smsAnswer(error)
    }
  }
}

/** It takes a third of a second to load, and most servers send no SMS. */
async function openClient({ accountSid, authToken, baseUrl }: SmsInit): Promise<twilioSdk.Twilio> {
  const { default: twilio } = await import('twilio')
  class Client extends twilio.RequestClient {
    // The SDK has no option for another address.
    override request<T>(options: Parameters<typeof twilio.RequestClient.prototype.request<T>>[0]) {
      const { pathname, search } = new URL(options.uri)
      return super.request<T>(
        baseUrl === null ? options : { ...options, uri: `${baseUrl}${pathname}${search}` },
      )
    }
  }
  return twilio(accountSid, authToken, { httpClient: new Client({ timeout: ANSWER_MS, autoRetry: false }) })
}

interface SmsError {
  message: string
  /** Of HTTP, where the service answered. */
  status?: unknown
  /** The service's number for what is wrong, or the system's name for it. */
  code?: unknown
}

/** Where the request cannot have left. */
const NOT_LEFT = ['ECONNREFUSED', 'ENOTFOUND', 'EAI_AGAIN', 'EHOSTUNREACH', 'ENETUNREACH']

/** What a failed attempt means. */
export function smsAnswer(error: unknown): Answer {
  const { message, status, code }: SmsError = error instanceof Error ? error : { message: String(error) }
  const said = plainAnswer(message)
  if (typeof status !== 'number') {
    if (typeof code === 'string' && NOT_LEFT.includes(code)) return { outcome: 'again', answer: `${said}.` }
    return { outcome: 'unknown', answer: `No answer from the SMS service: ${said}.` }
  }
  const answer = `HTTP ${status}${typeof code === 'number' ? `, ${code}` : ''}: ${said}`
  // Credentials that are refused are the server's to set right, and no fault of the number's.
  const isTheNumbers = status >= 400 && status < 500 && ![401, 403, 408, 429].includes(status)
  return { outcome: isTheNumbers ? 'failed' : 'again', answer }
}
