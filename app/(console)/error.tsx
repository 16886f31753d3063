'use client'

import { FailedState, LinkButton, PageHeading } from '@/components/ui'

export default function ConsoleError({
  error,
  reset,
}: {
  error: Error & { digest?: string }
  reset: () => void
}) {
  return (
    <>
      <PageHeading title="This page could not be shown" />
      <FailedState
        title="The server failed while making the page."
        onRetry={reset}
        actions={
          <LinkButton kind="quiet" href="/overlays">
            Go to the overlays
          </LinkButton>
        }
      >
        Measuring goes on without it. If it fails again, give the operator of this server the mark{' '}
        <code className="font-figures">{error.digest ?? 'none'}</code>, which stands in its log.
      </FailedState>
    </>
  )
}
