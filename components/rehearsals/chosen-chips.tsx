'use client'

import { Button } from '@/components/ui'
import type { Excluded } from '@/lib/data/rehearsal-dto'
import { formatLink } from '@/lib/face/format'
import {
  betweenId,
  labelId,
  linkId,
  NOTHING,
  toggleBetween,
  toggleLabel,
  toggleLink,
  toggleNode,
} from '@/lib/face/rehearsal'

/** More are not drawn: they are seen in the lists. */
const DRAWN = 24

interface Chip {
  id: string
  text: string
  without: (exclude: Excluded) => Excluded
}

/** What is chosen, one by one, to be put back. */
export function ChosenChips({
  exclude,
  onChange,
}: {
  exclude: Excluded
  onChange: (change: (exclude: Excluded) => Excluded) => void
}) {
  const chips = chipsOf(exclude)
  if (chips.length === 0) return null
  return (
    <ul aria-label="Chosen" className="flex flex-wrap items-center gap-1.5">
      {chips.slice(0, DRAWN).map(({ id, text, without }) => (
        <li key={id} className="max-w-full">
          <button
            type="button"
            aria-label={`Put back ${text}`}
            onClick={() => onChange(without)}
            className="inline-flex min-h-8 max-w-full items-center gap-2 border border-edge px-2 text-left text-sm hover:border-ink pointer-coarse:min-h-11"
          >
            <span className="min-w-0 wrap-anywhere">{text}</span>
            <svg viewBox="0 0 12 12" className="size-2.5 shrink-0" aria-hidden="true">
              <path d="M2 2l8 8M10 2l-8 8" stroke="currentColor" strokeWidth="2" />
            </svg>
          </button>
        </li>
      ))}
      {chips.length > DRAWN ? <li className="text-sm text-soft">and {chips.length - DRAWN} more</li> : null}
      {chips.length > 1 ? (
        <li>
          <Button kind="quiet" onClick={() => onChange(() => NOTHING)}>
            Put all back
          </Button>
        </li>
      ) : null}
    </ul>
  )
}

function chipsOf({ nodes, labels, links, between }: Excluded): Chip[] {
  return [
    ...labels.map((label) => ({
      id: `label ${labelId(label)}`,
      text: `all with ${label.key} ${label.value}`,
      without: (was: Excluded) => toggleLabel(was, label),
    })),
    ...between.map((pair) => ({
      id: `between ${betweenId(pair)}`,
      text: `links between ${pair.key} ${pair.a} and ${pair.b}`,
      without: (was: Excluded) => toggleBetween(was, pair),
    })),
    ...links.map((link) => ({
      id: `link ${linkId(link)}`,
      text: formatLink(...link),
      without: (was: Excluded) => toggleLink(was, link),
    })),
    ...nodes.map((name) => ({
      id: `node ${name}`,
      text: name,
      without: (was: Excluded) => toggleNode(was, name),
    })),
  ]
}
