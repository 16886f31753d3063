'use client'

import { FailedState, LinkButton } from '@/components/ui'

export default function PageError({
  error,
  reset,
}: {
  error: Error & { digest?: string }
  reset: () => void
}) {
  return (
    <main id="main" className="mx-auto max-w-2xl px-4 py-16">
      <h1 className="mb-6 text-3xl">This page could not be shown</h1>
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
    </main>
  )
}
