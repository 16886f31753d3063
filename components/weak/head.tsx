'use client'

import { Button, type Figure, Lambda, LinkButton, Note, Time, TitleBlock } from '@/components/ui'
import { type Role, roleReaches } from '@/lib/auth/permissions'
import type { WeakPlace } from '@/lib/data/weak-dto'
import { formatInterval, formatReading, formatShare } from '@/lib/face/format'
import { overlayPageUrls } from '@/lib/face/urls'

export interface WeakHeadProps {
  slug: string
  place: WeakPlace
  role: Role
  onNow: () => void
}

/** The sentence first, and the figures it rests on. */
export function WeakHead({ slug, place, role, onNow }: WeakHeadProps) {
  const { reading, withheld, remark, isNow, at } = place
  return (
    <div className="grid gap-x-12 gap-y-6 lg:grid-cols-[minmax(0,1fr)_minmax(20rem,26rem)]">
      <div className="min-w-0 max-w-2xl">
        {isNow ? null : (
          <p className="mb-2 flex flex-wrap items-center gap-x-3 font-semibold">
            <span>
              As it was <Time at={at} show="both" />
            </span>
            <Button kind="quiet" onClick={onNow}>
              Back to now
            </Button>
          </p>
        )}
        <h1 aria-live="polite" className="text-[2rem] leading-[1.1] tracking-tight sm:text-[2.6rem]">
          {withheld?.because === 'nothing-joined' ? withheld.sentence : reading.verdict}
        </h1>
        {withheld?.because === 'nothing-joined' ? null : (
          <p className="mt-4 text-lg text-soft">{reading.detail}</p>
        )}
        {withheld ? (
          <div className="mt-4 border-l-4 border-ink pl-4">
            {withheld.because === 'nothing-joined' ? null : (
              <p className="font-semibold">{withheld.sentence}</p>
            )}
            <p className="mt-1">{withheld.next}</p>
            {withheld.because === 'nothing-joined' ? null : (
              <p className="mt-1 text-soft">
                Crossing links, the labels they follow and the figures of the cut stand here once one cut
                stands out. The moment below leads back to when one did.
              </p>
            )}
            <p className="mt-2 flex flex-wrap gap-2">
              {withheld.because === 'nothing-joined' && roleReaches(role, 'operator') ? (
                <LinkButton kind="main" href={`/overlays/${encodeURIComponent(slug)}/joining`}>
                  Create a joining code
                </LinkButton>
              ) : (
                <LinkButton href={overlayPageUrls(slug).nodes}>Look at the nodes</LinkButton>
              )}
            </p>
          </div>
        ) : null}
        {remark ? <Note className="mt-4">{remark}</Note> : null}
      </div>
      {withheld?.because === 'nothing-joined' ? null : (
        <div className="min-w-0">
          <TitleBlock label="The weak place in figures" figures={figuresFor(place)} />
        </div>
      )}
    </div>
  )
}

function figuresFor({ reading, sides, crossing, links }: WeakPlace): Figure[] {
  const { core, lambda2, low, high, last, level, confidence } = reading
  const shown = core ?? (lambda2 === null ? null : { lambda2, low, high })
  const figures: Figure[] = [
    {
      id: 'reading',
      main: true,
      label: (
        <>
          reading (<Lambda n={2} />)
        </>
      ),
      value: shown ? formatReading(shown.lambda2) : 'withheld',
      remark: shown
        ? shown.low !== null && shown.high !== null
          ? `${Math.round(confidence * 100)} %: ${formatInterval(shown.low, shown.high, shown.lambda2)}${core ? ', without loose ends' : ''}`
          : 'no interval yet'
        : last
          ? `last ${formatReading(last.lambda2)}`
          : 'none yet',
      grave: level === 'split' || reading.treatAsSplit,
    },
  ]
  if (!sides || !crossing) return figures
  const heaviest = Math.max(0, ...links.map(({ share }) => share ?? 0))
  const together = links.reduce((sum, { share, state }) => sum + (state === 'lost' ? 0 : (share ?? 0)), 0)
  return [
    ...figures,
    { id: 'side-a', label: 'side a', value: sides[0].nodes, remark: 'nodes, drawn round' },
    { id: 'side-b', label: 'side b', value: sides[1].nodes, remark: 'nodes, drawn square' },
    {
      id: 'links',
      label: 'crossing links',
      value: crossing.links,
      remark: `${formatReading(crossing.weight)} weight together`,
      grave: crossing.links === 0,
    },
    {
      id: 'share',
      label: 'of the reading they carry',
      value: links.length === 0 ? '–' : formatShare(together),
      remark: links.length === 0 ? 'none is named' : `the heaviest ${formatShare(heaviest)}`,
    },
  ]
}
