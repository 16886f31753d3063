'use client'

import Link from 'next/link'
import { useReading } from '@/components/live/hooks'
import { Time, Waiting } from '@/components/ui'
import type { Overlay, Reading } from '@/lib/data/dto'
import { cx } from '@/lib/face/cx'
import { formatCount, formatReading } from '@/lib/face/format'

const POLL_MS = 10_000

/** One row per overlay: how it is, in a sentence. */
export function OverlayList({ overlays, showTeam }: { overlays: readonly Overlay[]; showTeam: boolean }) {
  return (
    <ul className="border border-ink bg-sheet">
      {overlays.map((o) => (
        <OverlayRow key={o.slug} overlay={o} showTeam={showTeam} />
      ))}
    </ul>
  )
}

function OverlayRow({ overlay, showTeam }: { overlay: Overlay; showTeam: boolean }) {
  const reading = useReading(overlay.slug, { pollMs: POLL_MS })
  return (
    <li className="relative grid gap-x-8 gap-y-2 border-t border-hairline px-4 py-4 first:border-t-0 hover:bg-paper sm:px-6 md:grid-cols-[minmax(0,1fr)_auto]">
      <div className="min-w-0">
        <h2 className="text-xl">
          <Link href={`/overlays/${overlay.slug}`} className="after:absolute after:inset-0">
            {overlay.name}
          </Link>
        </h2>
        <p className="text-sm text-soft">
          {[
            showTeam || overlay.standing === 'partner' ? overlay.team.name : null,
            overlay.standing === 'partner' ? 'shared with you' : overlay.shared ? 'shared' : null,
            overlay.pace,
            overlay.disclosure,
            overlay.demo ? 'demo' : null,
          ]
            .filter(Boolean)
            .join(' · ')}
        </p>
        <div className="mt-1.5 min-h-6">
          {reading.data !== undefined ? (
            <Sentence overlay={overlay} reading={reading.data} />
          ) : reading.error ? (
            <p className="font-medium">The reading could not be loaded. {reading.error.message}</p>
          ) : (
            <Waiting label={`Loading the reading of ${overlay.name}`} className="h-6 max-w-sm" />
          )}
        </div>
      </div>
      <dl className="grid w-72 max-w-full grid-cols-[auto_1fr] content-start gap-x-4 text-sm">
        <dt className="text-soft">reading</dt>
        <dd className="text-right font-figures text-lg leading-6">{readingText(reading.data)}</dd>
        {reading.data && reading.data.lambda2 === null && reading.data.last ? (
          <>
            <dt className="text-soft">last value</dt>
            <dd className="text-right font-figures leading-6">{formatReading(reading.data.last.lambda2)}</dd>
          </>
        ) : null}
        <dt className="text-soft">agents heard</dt>
        <dd className="text-right font-figures leading-6">{heardOf(overlay, reading.data)}</dd>
        <dt className="text-soft">as of</dt>
        <dd className="text-right leading-6">{reading.data ? <Time at={reading.data.at} /> : '–'}</dd>
      </dl>
    </li>
  )
}

function Sentence({ overlay, reading }: { overlay: Overlay; reading: Reading | null }) {
  if (!reading) {
    return <p>{overlay.joined === 0 ? 'No agents have joined yet.' : 'Waiting for the first reading.'}</p>
  }
  const grave = reading.level === 'split' || reading.treatAsSplit || reading.data === 'unheard'
  return <p className={cx('font-medium', grave && 'text-vermilion')}>{reading.verdict}</p>
}

function readingText(reading: Reading | null | undefined): string {
  if (!reading) return '–'
  const value = reading.core?.lambda2 ?? reading.lambda2
  if (value !== null) return formatReading(value)
  return reading.last ? 'withheld' : 'none yet'
}

function heardOf(overlay: Overlay, reading: Reading | null | undefined): string {
  if (reading) return `${reading.coverage.heard} of ${reading.coverage.joined}`
  return formatCount(overlay.joined, 'joined', 'joined')
}
