'use client'

import Link from 'next/link'
import type { ReactNode } from 'react'
import { useOverlay } from '@/components/live/hooks'
import { roleReaches } from '@/lib/auth/permissions'
import type { Excluded } from '@/lib/data/rehearsal-dto'
import { rehearseHref } from '@/lib/face/rehearsal'

/** To the form with this filled in, for those who may start it. */
export function RehearseLink(props: { slug: string; exclude: Partial<Excluded>; children: ReactNode }) {
  const { slug, exclude, children } = props
  const overlay = useOverlay(slug)
  if (!overlay.data || !roleReaches(overlay.data.role, 'operator')) return null
  return (
    <Link href={rehearseHref(slug, { exclude })} className="rule-link">
      {children}
    </Link>
  )
}
