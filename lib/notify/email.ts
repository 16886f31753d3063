import { createTransport } from 'nodemailer'
import { type Answer, type Letter, plainAnswer } from './letter'
import { htmlOf, textOf, wordsOf } from './wording'

/** Each is shorter than an attempt may take, so that the step it failed at is known. */
const CONNECT_MS = 8_000
const SILENCE_MS = 12_000

export interface EmailInit {
  /** smtp:// or smtps://, with name and password where it wants them. */
  smtpUrl: string
  /** Whom mails come from. */
  from: string
  origin: string | null
}

/** Sends by SMTP, each mail on a connection of its own. */
export class EmailWay {
  readonly #init: EmailInit
  readonly #domain: string

  constructor(init: EmailInit) {
    this.#init = init
    this.#domain = /@([^\s>]+)/.exec(init.from)?.[1] ?? 'thinspan.invalid'
  }

  async send(address: string, letter: Letter, signal: AbortSignal): Promise<Answer> {
    let isTaking = false
    const transport = createTransport({
      transactionLog: true,
      logger: serverLines((line) => {
        isTaking ||= line.startsWith('354')
      }),
      url: this.#init.smtpUrl,
      dnsTimeout: CONNECT_MS,
      connectionTimeout: CONNECT_MS,
      greetingTimeout: CONNECT_MS,
      socketTimeout: SILENCE_MS,
      disableFileAccess: true,
      disableUrlAccess: true,
    })
    const close = () => transport.close()
    signal.addEventListener('abort', close, { once: true })
    try {
      const { response } = await transport.sendMail(this.#mail(address, letter))
      return { outcome: 'sent', answer: plainAnswer(response) }
    } catch (error) {
      return smtpAnswer(error, isTaking)
    } finally {
      signal.removeEventListener('abort', close)
    }
  }

  #mail(address: string, letter: Letter) {
    const words = wordsOf(letter, this.#init.origin)
    const { incident } = letter.body
    // Nobody sends the root: what names it belongs together, however the mails come.
    const root = incident ? `<incident-${incident.id}@${this.#domain}>` : undefined
    return {
      from: this.#init.from,
      to: { name: '', address },
      subject: words.subject,
      text: textOf(words),
      html: htmlOf(words),
      messageId: `<${letter.id}@${this.#domain}>`,
      inReplyTo: root,
      references: root,
      date: letter.at,
      // RFC 3834: no holiday replies to a machine.
      headers: { 'Auto-Submitted': 'auto-generated' },
    }
  }
}

interface SmtpError {
  message: string
  code?: unknown
  command?: unknown
  response?: unknown
  responseCode?: unknown
}

/** Hears what the server says: errors do not tell whether it had begun to take the mail. */
function serverLines(onLine: (line: string) => void) {
  const hear = (entry: unknown, line: unknown) => {
    if (typeof entry === 'object' && entry && 'tnx' in entry && entry.tnx === 'server') onLine(String(line))
  }
  const ignore = () => {}
  return {
    level: ignore,
    trace: ignore,
    debug: hear,
    info: ignore,
    warn: ignore,
    error: ignore,
    fatal: ignore,
  }
}

/** What a failed attempt means. `isTaking`: the server had said that it takes the mail now. */
export function smtpAnswer(error: unknown, isTaking: boolean): Answer {
  const { message, code, command, response, responseCode }: SmtpError =
    error instanceof Error ? error : { message: String(error) }
  const said = plainAnswer(typeof response === 'string' && response !== '' ? response : message)
  const isRefused = typeof responseCode === 'number' && responseCode >= 500
  // A sender address or password that is refused is the server's to set right, and no fault of the recipient's.
  if (isRefused && (command === 'RCPT TO' || command === 'DATA')) return { outcome: 'failed', answer: said }
  // Once the mail itself has been said, silence does not mean that it was not taken.
  if (isTaking && responseCode === undefined)
    return { outcome: 'unknown', answer: `No answer to the mail: ${said}` }
  const where = code === 'EAUTH' ? 'Sign-in at the mail server failed: ' : ''
  return { outcome: 'again', answer: `${where}${said}` }
}
