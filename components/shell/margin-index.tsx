'use client'

import Link from 'next/link'
import { usePathname } from 'next/navigation'
import { type ReactNode, useEffect, useRef } from 'react'
import { useOverlay } from '@/components/live/hooks'
import { roleReaches } from '@/lib/auth/permissions'
import { cx } from '@/lib/face/cx'
import { OTHER_PAGES, overlayOfPath, overlayPages, type PageEntry } from '@/lib/face/pages'
import { ActingFor } from './acting-for'

/** The lettered index: a margin on wide screens, a strip with a menu on narrow ones. */
export function MarginIndex({ mayAudit, foot }: { mayAudit: boolean; foot: ReactNode }) {
  const path = usePathname()
  const slug = overlayOfPath(path)
  const overlay = useOverlay(slug)
  const known = slug !== null && overlay.error?.status !== 404
  const name = known ? (overlay.data?.name ?? slug) : null
  const menu = useRef<HTMLDetailsElement>(null)

  useEffect(() => {
    if (menu.current) menu.current.open = false
  }, [path])

  const mayAdd = overlay.data ? roleReaches(overlay.data.role, 'operator') : true
  const lettered = known ? overlayPages(slug).filter((e) => mayAdd || !e.operator) : []
  const others = OTHER_PAGES.filter((e) => mayAudit || !e.operator)
  return (
    <header className="border-hairline bg-paper md:sticky md:top-0 md:flex md:h-dvh md:w-44 md:shrink-0 md:flex-col md:overflow-y-auto md:border-r md:py-8">
      <div className="flex items-start justify-between gap-4 border-b border-hairline px-4 py-3 md:block md:border-b-0 md:px-6 md:py-0">
        <div className="min-w-0">
          <Link href="/overlays" className="font-head text-xl font-bold tracking-tight">
            Thinspan
          </Link>
          {name ? <p className="truncate text-soft md:mt-0.5">{name}</p> : null}
          {known && overlay.data ? (
            <ActingFor slug={overlay.data.slug} seats={overlay.data.seats} as={overlay.data.as} />
          ) : null}
        </div>
        <details ref={menu} className="relative md:hidden">
          <summary className="flex min-h-11 items-center border border-edge px-4">Menu</summary>
          <div className="absolute right-0 z-30 mt-1 w-60 space-y-5 border-2 border-ink bg-paper p-5">
            <Entries label="Other pages" entries={others} path={path} />
            {foot}
          </div>
        </details>
      </div>
      {lettered.length > 0 ? (
        <nav
          aria-label={`Pages of ${name}`}
          className="overflow-x-auto border-b border-hairline px-2 md:mt-7 md:overflow-visible md:border-b-0 md:px-0"
        >
          <ul className="flex md:block">
            {lettered.map((e) => (
              <Entry key={e.href} entry={e} path={path} />
            ))}
          </ul>
        </nav>
      ) : null}
      <div className="mt-7 hidden md:block">
        <Entries label="Other pages" entries={others} path={path} />
      </div>
      <div className="mt-auto hidden px-6 pt-8 md:block">{foot}</div>
    </header>
  )
}

function Entries({ label, entries, path }: { label: string; entries: readonly PageEntry[]; path: string }) {
  return (
    <nav aria-label={label}>
      <ul>
        {entries.map((e) => (
          <Entry key={e.href} entry={e} path={path} />
        ))}
      </ul>
    </nav>
  )
}

function Entry({ entry, path }: { entry: PageEntry; path: string }) {
  const here = path === entry.href
  return (
    <li className="shrink-0">
      <Link
        href={entry.href}
        aria-current={here ? 'page' : undefined}
        className={cx(
          'flex min-h-11 items-center gap-3 px-2 md:min-h-9 md:px-6',
          here
            ? 'text-ink shadow-[inset_0_-3px_var(--ink)] md:shadow-[inset_-3px_0_var(--ink)]'
            : 'text-soft hover:text-ink',
        )}
      >
        {entry.letter ? (
          <span className="w-3 text-xs font-semibold" aria-hidden="true">
            {entry.letter}
          </span>
        ) : null}
        {entry.label}
      </Link>
    </li>
  )
}
