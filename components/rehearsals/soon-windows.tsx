'use client'

import Link from 'next/link'
import { Button, Time } from '@/components/ui'
import type { Excluded } from '@/lib/data/rehearsal-dto'
import { formatCount } from '@/lib/face/format'
import { type SoonWindow, withLabels } from '@/lib/face/rehearsal'

export interface SoonWindowsProps {
  slug: string
  windows: readonly SoonWindow[]
  onTake: (change: (exclude: Excluded) => Excluded, reason: string) => void
}

/** All that reboots tonight. */
export function SoonWindows({ slug, windows, onTake }: SoonWindowsProps) {
  const ofLabels = windows.filter(({ label, nodes }) => label !== null && nodes.length > 0)
  const take = (some: readonly SoonWindow[]) =>
    onTake(
      (exclude) =>
        withLabels(
          exclude,
          some.flatMap(({ label }) => label ?? []),
        ),
      some.map(({ reason }) => reason).join('; '),
    )
  if (windows.length === 0)
    return (
      <p className="text-soft">
        No maintenance window begins within the next 24 hours.{' '}
        <Link href={`/overlays/${encodeURIComponent(slug)}/warnings`} className="rule-link">
          Plan maintenance
        </Link>{' '}
        first to rehearse all that it takes away.
      </p>
    )
  return (
    <div className="space-y-3">
      <ul className="border-t border-hairline">
        {windows.map((window) => (
          <li
            key={window.id}
            className="flex flex-wrap items-center gap-x-4 gap-y-1 border-b border-hairline py-2"
          >
            <span className="min-w-0 flex-1 basis-64">
              <span className="block font-medium break-words">{window.reason}</span>
              <span className="block text-sm text-soft">
                <Time at={window.startsAt} show="both" /> to <Time at={window.endsAt} show="moment" />
                {window.label ? `, ${window.label.key}=${window.label.value}` : ''}
              </span>
            </span>
            <TakeWindow window={window} onTake={() => take([window])} />
          </li>
        ))}
      </ul>
      {ofLabels.length > 1 ? (
        <Button onClick={() => take(ofLabels)}>Take all that go in these windows</Button>
      ) : null}
    </div>
  )
}

function TakeWindow({ window, onTake }: { window: SoonWindow; onTake: () => void }) {
  if (window.label === null)
    return (
      <p className="max-w-xs text-sm text-soft">
        It is of the whole overlay: no node would remain. Choose those that go at the same time by name or
        label.
      </p>
    )
  if (window.nodes.length === 0)
    return <p className="text-sm text-soft">No node that has joined has this label.</p>
  return (
    <Button
      onClick={onTake}
      aria-label={`Take the ${formatCount(window.nodes.length, 'node')} of ${window.reason}`}
    >
      Take {formatCount(window.nodes.length, 'node')}
    </Button>
  )
}
