import type { ReactNode } from 'react'
import { EmptyState, Sheet, Time } from '@/components/ui'
import type { KeptMessages as Kept } from '@/lib/data/kept-messages'

/** What the stand-ins were sent, newest first. */
export function KeptMessages({ kept: { mails, texts, calls } }: { kept: Kept }) {
  return (
    <div className="space-y-5">
      <Sheet heading="Mails" aside={`${mails.length} kept`}>
        {mails.length === 0 ? <Nothing what="mail" /> : null}
        {mails.map((mail) => (
          <article
            key={`${mail.at} ${mail.to.join()} ${mail.subject}`}
            className="border-t border-hairline py-4"
          >
            <h3 className="text-base break-words">{mail.subject}</h3>
            <p className="text-sm text-soft break-words">
              to {mail.to.join(', ')}, <Time at={mail.at} show="both" />
            </p>
            <Text>{mail.text}</Text>
            <Folded what="its HTML">
              <Text>{mail.html}</Text>
            </Folded>
          </article>
        ))}
      </Sheet>
      <Sheet heading="SMS" aside={`${texts.length} kept`}>
        {texts.length === 0 ? <Nothing what="SMS" /> : null}
        {texts.map((sms) => (
          <article key={`${sms.at} ${sms.to} ${sms.text}`} className="border-t border-hairline py-4">
            <p className="text-sm text-soft">
              to {sms.to}, <Time at={sms.at} show="both" />, {sms.text.length} characters
            </p>
            <Text>{sms.text}</Text>
          </article>
        ))}
      </Sheet>
      <Sheet heading="Webhook calls" aside={`${calls.length} kept`}>
        {calls.length === 0 ? <Nothing what="webhook call" /> : null}
        {calls.map((call) => (
          <article key={`${call.at} ${call.id}`} className="border-t border-hairline py-4">
            <p className="text-sm text-soft break-words">
              {call.path}, answered {call.status}, <Time at={call.at} show="both" />
            </p>
            <p>
              {call.signedAs === null
                ? 'Signed by no webhook of your teams.'
                : `The signature is that of “${call.signedAs}”.`}
            </p>
            <Text>{call.body}</Text>
          </article>
        ))}
      </Sheet>
    </div>
  )
}

function Nothing({ what }: { what: string }) {
  return (
    <EmptyState title={`No ${what} was kept yet.`}>
      Send a test from the Telling page, and load this page again.
    </EmptyState>
  )
}

function Text({ children }: { children: string }) {
  return <pre className="mt-2 font-figures text-sm break-words whitespace-pre-wrap">{children}</pre>
}

function Folded({ what, children }: { what: string; children: ReactNode }) {
  return (
    <details className="mt-2">
      <summary className="text-sm">{what}</summary>
      {children}
    </details>
  )
}
