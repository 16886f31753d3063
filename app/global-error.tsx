'use client'

import './globals.css'

export default function GlobalError({
  error,
  reset,
}: {
  error: Error & { digest?: string }
  reset: () => void
}) {
  return (
    <html lang="en-GB">
      <body>
        <main className="mx-auto max-w-2xl px-4 py-16">
          <h1 className="mb-4 text-3xl">Thinspan could not be shown</h1>
          <p className="mb-6">
            Measuring goes on without it. Try again; if it fails again, give the operator of this server the
            mark <code>{error.digest ?? 'none'}</code>, which stands in its log.
          </p>
          <button type="button" onClick={reset} className="min-h-10 border border-ink px-4">
            Try again
          </button>
        </main>
      </body>
    </html>
  )
}
