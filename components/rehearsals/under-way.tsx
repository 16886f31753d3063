'use client'

import Link from 'next/link'
import { Sheet, useNow } from '@/components/ui'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import { headline, rehearsalPage } from '@/lib/face/rehearsal'
import { CancelButton } from './acts'
import { Progress } from './progress'
import type { RehearsalAction } from './types'

export interface UnderWayProps {
  slug: string
  /** Not over yet. */
  items: readonly RehearsalDto[]
  most: number
  /** Null for those who may only look. */
  cancel: RehearsalAction | null
  onDone: () => void
}

export function UnderWay({ slug, items, most, cancel, onDone }: UnderWayProps) {
  const now = useNow()
  if (items.length === 0) return null
  return (
    <Sheet heading="Under way" aside={`at most ${most} at once`}>
      <ul className="space-y-4">
        {items.map((rehearsal) => (
          <li key={rehearsal.id} className="flex flex-wrap items-end gap-x-6 gap-y-2">
            <div className="min-w-0 flex-1 basis-72 space-y-1.5">
              <Link href={rehearsalPage(slug, rehearsal.id)} className="rule-link font-medium break-words">
                {headline(rehearsal, now)}
              </Link>
              <Progress rehearsal={rehearsal} most={most} />
            </div>
            {cancel ? <CancelButton slug={slug} id={rehearsal.id} cancel={cancel} onDone={onDone} /> : null}
          </li>
        ))}
      </ul>
    </Sheet>
  )
}
