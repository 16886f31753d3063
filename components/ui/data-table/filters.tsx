'use client'

import type { ReactNode } from 'react'
import { cx } from '@/lib/face/cx'
import { inputClass } from '../field'
import type { DataTableProps } from './types'
import type { ChosenFilters } from './use-rows'

interface FiltersProps<Row> extends DataTableProps<Row> {
  text: string
  onText: (text: string) => void
  chosen: ChosenFilters
  onChosen: (chosen: ChosenFilters) => void
  found: number
  actions: ReactNode
}

export function Filters<Row>(props: FiltersProps<Row>) {
  const { search, filters, rows, found, actions } = props
  if (!search && !filters?.length && !actions) return null
  return (
    <div className="mb-2 flex flex-wrap items-end gap-3">
      {search ? (
        <label className="min-w-40 flex-1 basis-48 sm:max-w-72">
          <span className="mb-1 block text-sm text-soft">{search}</span>
          <input
            type="search"
            value={props.text}
            onChange={(e) => props.onText(e.target.value)}
            className={inputClass}
          />
        </label>
      ) : null}
      {filters?.map((f) => (
        <label key={f.id} className="min-w-28">
          <span className="mb-1 block text-sm text-soft">{f.label}</span>
          <select
            value={props.chosen[f.id] ?? ''}
            onChange={(e) => props.onChosen({ ...props.chosen, [f.id]: e.target.value })}
            className={cx(inputClass, 'pr-2')}
          >
            <option value="">all</option>
            {f.options.map((o) => (
              <option key={o.value} value={o.value}>
                {o.label}
              </option>
            ))}
          </select>
        </label>
      ))}
      <div className="ml-auto flex items-center gap-3">
        {search || filters?.length ? (
          <p className="text-sm text-soft" aria-live="polite">
            {found === rows.length ? `${rows.length} in all` : `${found} of ${rows.length}`}
          </p>
        ) : null}
        {actions}
      </div>
    </div>
  )
}
