/** Stand-ins for mail, SMS and webhooks: which are needed, and what the web process is told of them. */

const MAIL_FROM = 'Thinspan <thinspan@harbourline.example>'

/** Real ones by environment variable only; a stand-in for each that is not set. */
export function fakesWanted(env) {
  return { mail: !env.THINSPAN_SMTP_URL, sms: !env.THINSPAN_TWILIO_SID }
}

/** What scripts/fakes.ts says once it listens; null for any other line. */
export function parseFakesLine(line) {
  try {
    const { httpUrl, smtpUrl } = JSON.parse(line).fakes
    return typeof httpUrl === 'string' && typeof smtpUrl === 'string' ? { httpUrl, smtpUrl } : null
  } catch {
    return null
  }
}

/** The variables to add for the web process. */
export function fakesEnv(env, { httpUrl, smtpUrl }) {
  const { mail, sms } = fakesWanted(env)
  return {
    THINSPAN_FAKES_URL: httpUrl,
    ...(mail && { THINSPAN_SMTP_URL: smtpUrl, THINSPAN_MAIL_FROM: env.THINSPAN_MAIL_FROM || MAIL_FROM }),
    ...(sms && {
      THINSPAN_SMS_URL: httpUrl,
      THINSPAN_TWILIO_SID: `AC${'0'.repeat(32)}`,
      THINSPAN_TWILIO_TOKEN: 'stand-in',
      THINSPAN_TWILIO_FROM: '+12025550100',
    }),
  }
}

/** For the person at the terminal; `shown` is where Thinspan is. */
export function fakesSentence(env, shown) {
  const { mail, sms } = fakesWanted(env)
  const what = [mail && 'E-mail', sms && 'SMS'].filter(Boolean).join(' and ')
  return `${what} reach nobody: stand-ins on this machine keep them, to be read at ${shown}/dev/messages.`
}
