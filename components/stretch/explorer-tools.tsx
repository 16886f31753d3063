'use client'

import { Button, inputClass } from '@/components/ui'
import { ZOOMS } from '@/lib/face/stretch'
import type { Zoom } from './use-zoom'

export interface ExplorerToolsProps {
  keys: readonly string[]
  laneKey: string | null
  onLane: (key: string) => void
  search: string
  onSearch: (text: string) => void
  /** Enter in the search field: the next match. */
  onNext: () => void
  /** What was found, in words; null while nothing is sought. */
  found: string | null
  zoom: Zoom
  asTable: boolean
  onTable: () => void
}

export function ExplorerTools(props: ExplorerToolsProps) {
  const { zoom, asTable } = props
  return (
    <div className="mb-3 flex flex-wrap items-end gap-x-4 gap-y-2">
      <label className="min-w-32 text-sm text-soft">
        lanes by
        <select
          value={props.laneKey ?? ''}
          onChange={(event) => props.onLane(event.target.value)}
          className={`${inputClass} mt-1 pr-2`}
        >
          {props.keys.map((key) => (
            <option key={key} value={key}>
              {key}
            </option>
          ))}
          <option value="">nothing</option>
        </select>
      </label>
      {asTable ? null : (
        <>
          <label className="min-w-40 flex-1 text-sm text-soft sm:max-w-64">
            find a node
            <input
              type="search"
              value={props.search}
              onChange={(event) => props.onSearch(event.target.value)}
              onKeyDown={(event) => (event.key === 'Enter' ? props.onNext() : undefined)}
              className={`${inputClass} mt-1`}
            />
          </label>
          <p role="status" className="min-h-6 self-center text-sm text-soft empty:hidden">
            {props.found}
          </p>
          <fieldset className="flex items-center">
            <legend className="mb-1 text-sm text-soft">
              zoom <span className="font-figures">{zoom.zoom}×</span>
            </legend>
            <Button
              className="w-11"
              aria-label="Zoom out"
              disabled={zoom.zoom === ZOOMS[0]}
              onClick={() => zoom.by(-1)}
            >
              −
            </Button>
            <Button
              className="-ml-px w-11"
              aria-label="Zoom in"
              disabled={zoom.zoom === ZOOMS.at(-1)}
              onClick={() => zoom.by(1)}
            >
              +
            </Button>
            <Button kind="quiet" className="text-sm" disabled={zoom.zoom === 1} onClick={zoom.whole}>
              whole
            </Button>
          </fieldset>
        </>
      )}
      <Button kind="quiet" className="-mr-2 ml-auto text-sm" aria-pressed={asTable} onClick={props.onTable}>
        {asTable ? 'Show the drawing' : 'Show as a table'}
      </Button>
    </div>
  )
}
