'use client'

import Link from 'next/link'
import { useRehearsals } from '@/components/live/hooks'
import { Note, useNow } from '@/components/ui'
import { lastLine, rehearsalPage } from '@/lib/face/rehearsal'

/** What was rehearsed within a day, or is being; nothing where nothing was. */
export function RehearsalLine({ slug }: { slug: string }) {
  const rehearsals = useRehearsals(slug)
  const now = useNow()
  const line = rehearsals.data && now !== null ? lastLine(rehearsals.data.items, now) : null
  if (!line) return null
  return (
    <Note>
      <Link href={rehearsalPage(slug, line.id)} className="rule-link break-words">
        {line.text}
      </Link>
    </Note>
  )
}
