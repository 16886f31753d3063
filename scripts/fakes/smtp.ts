import { once } from 'node:events'
import { type AddressObject, simpleParser } from 'mailparser'
import { SMTPServer, type SMTPServerOptions } from 'smtp-server'
import { type Kept, keep } from './kept'
import { portOf } from './port-of'

/** Said at the end of each mail, so that a delivery log cannot take it for more than it is. */
export const SMTP_ANSWER = 'Kept by the stand-in on this machine: nobody was sent anything.'

export interface FakeSmtp {
  url: string
  stop(): Promise<void>
}

/** A mail server on loopback that keeps what it is given. */
export async function startFakeSmtp(
  { kept, now }: { kept: Kept; now(): Date },
  { port = 0, options = {} }: { port?: number; options?: SMTPServerOptions } = {},
): Promise<FakeSmtp> {
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS'],
    disableReverseLookup: true,
    onAuth: (_auth, _session, callback) => callback(null, { user: 'anyone' }),
    onData(stream, session, callback) {
      simpleParser(stream)
        .then((mail) => {
          keep(kept.mails, {
            at: now().toISOString(),
            from: addressesOf(mail.from).join(', '),
            to: session.envelope.rcptTo.map(({ address }) => address),
            subject: mail.subject ?? '',
            messageId: mail.messageId ?? null,
            references: [mail.references ?? []].flat(),
            text: mail.text ?? '',
            html: mail.html || '',
          })
          callback(null, SMTP_ANSWER)
        })
        .catch((error: Error) => callback(error))
    },
    ...options,
  })
  // A client that goes away in the middle is no reason to end.
  server.on('error', () => {})
  server.listen(port, '127.0.0.1')
  await once(server.server, 'listening')
  return {
    url: `smtp://127.0.0.1:${portOf(server.server)}`,
    stop: () => new Promise((resolve) => server.close(() => resolve())),
  }
}

function addressesOf(found: AddressObject | AddressObject[] | undefined): string[] {
  return [found ?? []].flat().flatMap(({ value }) => value.map(({ address }) => address ?? ''))
}
