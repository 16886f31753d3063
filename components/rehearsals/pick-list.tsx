'use client'

import { type ReactNode, useId, useMemo, useState } from 'react'
import { Button, inputClass } from '@/components/ui'

/** More are not drawn: the search finds them. */
const DRAWN = 200

export interface Pick {
  id: string
  label: ReactNode
  /** On the right of the label. */
  detail?: ReactNode
  /** What the search looks in. */
  text: string
}

export interface PickListProps {
  legend: string
  /** Label of the search; left out where there is little to look through. */
  search?: string
  items: readonly Pick[]
  isChosen: (id: string) => boolean
  onToggle: (id: string) => void
  /** Takes in all that the search finds. */
  onAll?: (ids: readonly string[]) => void
  empty: ReactNode
}

/** Many of many, found by typing. */
export function PickList(props: PickListProps) {
  const { legend, search, items, isChosen, onToggle, onAll, empty } = props
  const [sought, setSought] = useState('')
  const id = useId()
  const found = useMemo(() => {
    const words = sought.toLowerCase().split(/\s+/).filter(Boolean)
    return items.filter(({ text }) => words.every((word) => text.toLowerCase().includes(word)))
  }, [items, sought])
  if (items.length === 0) return <p className="text-soft">{empty}</p>
  return (
    <fieldset className="min-w-0">
      <legend className="sr-only">{legend}</legend>
      {search ? (
        <div className="mb-2 flex flex-wrap items-end gap-x-3 gap-y-2">
          <label htmlFor={id} className="min-w-40 flex-1 sm:max-w-72">
            <span className="mb-1 block text-sm text-soft">{search}</span>
            <input
              id={id}
              type="search"
              value={sought}
              onChange={(event) => setSought(event.target.value)}
              className={inputClass}
            />
          </label>
          {onAll && sought.trim() !== '' && found.length > 0 ? (
            <Button kind="quiet" onClick={() => onAll(found.map((one) => one.id))}>
              Take all {found.length} found
            </Button>
          ) : null}
          <p aria-live="polite" className="ml-auto text-sm text-soft">
            {found.length === items.length ? `${items.length} in all` : `${found.length} of ${items.length}`}
          </p>
        </div>
      ) : null}
      <div className="relative max-h-72 overflow-y-auto border border-edge bg-sheet">
        {found.slice(0, DRAWN).map((one) => (
          <label
            key={one.id}
            className="flex min-h-10 flex-wrap items-center gap-x-3 border-b border-hairline px-3 py-1.5 last:border-b-0 has-checked:bg-paper pointer-coarse:min-h-11"
          >
            <input
              type="checkbox"
              checked={isChosen(one.id)}
              onChange={() => onToggle(one.id)}
              className="size-4 shrink-0 accent-(--ink)"
            />
            <span className="min-w-0 wrap-anywhere">{one.label}</span>
            {one.detail ? <span className="ml-auto text-sm text-soft">{one.detail}</span> : null}
          </label>
        ))}
        {found.length === 0 ? (
          <p className="px-3 py-2 text-soft">Nothing matches. Change the search.</p>
        ) : null}
        {found.length > DRAWN ? (
          <p className="px-3 py-2 text-sm text-soft">{found.length - DRAWN} more: type to find them.</p>
        ) : null}
      </div>
    </fieldset>
  )
}
