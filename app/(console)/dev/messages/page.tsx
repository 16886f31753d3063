import type { Metadata } from 'next'
import { KeptMessages } from '@/components/dev/kept-messages'
import { PageHeading, ProblemState } from '@/components/ui'
import { listKeptMessages } from '@/lib/data'
import { page } from '@/lib/http'

export const metadata: Metadata = { title: 'Kept messages' }

/** Only there where `npm start` has started the stand-ins. */
export default async function KeptMessagesPage() {
  const kept = await page('kept-message.list', (call) =>
    listKeptMessages(
      call,
      { fetch: (url) => fetch(url, { cache: 'no-store' }) },
      process.env.THINSPAN_FAKES_URL,
    ),
  )
  return (
    <>
      <PageHeading title="Kept messages">
        Nothing here has reached anybody: these are stand-ins on this machine for a mail server, the SMS
        service and a program with a webhook. For real ones set THINSPAN_SMTP_URL and THINSPAN_TWILIO_SID, and
        start again.
      </PageHeading>
      {kept.ok ? <KeptMessages kept={kept.value} /> : <ProblemState problem={kept.problem} />}
    </>
  )
}
