import { EmailWay } from './email'
import type { Answer, Ways } from './letter'
import { readPrivateAllowed } from './public-address'
import { SmsWay } from './sms'
import { WebhookWay } from './webhook'

/** What the environment says of sending: the variables read below. */
export type SendingSettings = Readonly<Record<string, string | undefined>>

/** A way that is not set up says so for each message, where people see it. */
export function waysFrom(settings: SendingSettings): Ways {
  const address = settings.THINSPAN_ADDRESS || settings.THINSPAN_URL
  const origin = address ? new URL(address).origin : null
  const email = emailFrom(settings, origin)
  const sms = smsFrom(settings, origin)
  const webhook = new WebhookWay({
    allowed: readPrivateAllowed(settings.THINSPAN_WEBHOOK_PRIVATE ?? ''),
    alsoOrigin: settings.THINSPAN_FAKES_URL ? new URL(settings.THINSPAN_FAKES_URL).origin : null,
    origin,
  })
  const isSetUp = { email: email instanceof EmailWay, sms: sms instanceof SmsWay, webhook: true }
  return {
    isSetUp: (way) => isSetUp[way],
    email: async (to, letter, signal) =>
      email instanceof EmailWay ? email.send(to, letter, signal) : notSetUp('E-mail', email),
    sms: async (to, letter) => (sms instanceof SmsWay ? sms.send(to, letter) : notSetUp('SMS', sms)),
    webhook: (target, letter, signal) => webhook.send(target, letter, signal),
  }
}

function emailFrom(settings: SendingSettings, origin: string | null): EmailWay | string[] {
  const { THINSPAN_SMTP_URL: smtpUrl, THINSPAN_MAIL_FROM: from } = settings
  if (smtpUrl && from) return new EmailWay({ smtpUrl, from, origin })
  return missing(settings, ['THINSPAN_SMTP_URL', 'THINSPAN_MAIL_FROM'])
}

function smsFrom(settings: SendingSettings, origin: string | null): SmsWay | string[] {
  const {
    THINSPAN_TWILIO_SID: accountSid,
    THINSPAN_TWILIO_TOKEN: authToken,
    THINSPAN_TWILIO_FROM: from,
  } = settings
  if (accountSid && authToken && from)
    return new SmsWay({
      accountSid,
      authToken,
      from,
      baseUrl: settings.THINSPAN_SMS_URL ? new URL(settings.THINSPAN_SMS_URL).origin : null,
      origin,
    })
  return missing(settings, ['THINSPAN_TWILIO_SID', 'THINSPAN_TWILIO_TOKEN', 'THINSPAN_TWILIO_FROM'])
}

const missing = (settings: SendingSettings, wanted: readonly string[]) =>
  wanted.filter((name) => !settings[name])

function notSetUp(what: string, names: readonly string[]): Answer {
  return {
    outcome: 'failed',
    answer: `${what} is not set up on this server: set ${names.join(' and ')}, start it again, and send this again by hand.`,
  }
}
