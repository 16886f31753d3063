import type { Metadata, Viewport } from 'next'
import { cookies } from 'next/headers'
import type { ReactNode } from 'react'
import { parseSheetChoice, SHEET_COOKIE } from '@/lib/face/sheet-choice'
import { fontVariables } from './fonts'
import './globals.css'

export const metadata: Metadata = {
  title: { default: 'Thinspan', template: '%s – Thinspan' },
  description: 'How close an overlay is to coming apart, where, and what to do about it.',
}

export const viewport: Viewport = {
  width: 'device-width',
  initialScale: 1,
  themeColor: [
    { media: '(prefers-color-scheme: light)', color: '#f3efe4' },
    { media: '(prefers-color-scheme: dark)', color: '#0f141a' },
  ],
}

export default async function RootLayout({ children }: { children: ReactNode }) {
  // Read on the server, so that the first paint already has the chosen sheet.
  const choice = parseSheetChoice((await cookies()).get(SHEET_COOKIE)?.value)
  return (
    <html lang="en-GB" className={fontVariables} data-sheet={choice === 'system' ? undefined : choice}>
      <body>
        <a
          href="#main"
          className="sr-only bg-ink px-4 py-2 text-paper focus:not-sr-only focus:fixed focus:top-2 focus:left-2 focus:z-50"
        >
          Skip to the content
        </a>
        {children}
      </body>
    </html>
  )
}
