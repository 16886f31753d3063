import Link from 'next/link'
import { Sheet } from '@/components/ui'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import { formatCount, formatInterval, formatReading } from '@/lib/face/format'
import { rehearseHref } from '@/lib/face/rehearsal'

/** Where not all can go at once: an order in which they can. */
export function Waves({ slug, rehearsal, may }: { slug: string; rehearsal: RehearsalDto; may: boolean }) {
  const { waves, answer, state, taken } = rehearsal
  if (answer === null || answer === 'holds') return null
  if (!waves || waves.length === 0) {
    if (taken === null || taken < 2) return null
    return (
      <Sheet heading="In waves">
        <p className="max-w-2xl text-soft">
          {state === 'running'
            ? 'An order in which they can go one after the other is being looked for.'
            : 'No order in which all of them could go one after the other was found. Strengthen the overlay first, or take fewer.'}
        </p>
      </Sheet>
    )
  }
  return (
    <Sheet
      heading="In waves"
      aside={`${formatCount(waves.length, 'wave')}, each rehearsed${state === 'running' ? ', more to come' : ''}`}
    >
      <p className="mb-3 max-w-2xl">
        Not all can go at once. In this order they can: let all of a wave be back before the next one goes.
      </p>
      <ol className="border-t border-hairline">
        {waves.map(({ nodes, lambda2, low, high }, index) => (
          <li
            key={nodes.join('\n')}
            className="flex flex-wrap items-baseline gap-x-6 gap-y-1 border-b border-hairline py-2.5"
          >
            <span className="w-20 shrink-0 font-semibold">Wave {index + 1}</span>
            <span className="min-w-0 flex-1 basis-56 break-words">{nodes.join(', ')}</span>
            <span className="shrink-0 font-figures">
              {formatReading(lambda2)}{' '}
              <span className="text-sm text-soft">({formatInterval(low, high, lambda2)})</span>
            </span>
            {may ? (
              <Link href={rehearseHref(slug, { exclude: { nodes } })} className="rule-link shrink-0 text-sm">
                Rehearse wave {index + 1} again
              </Link>
            ) : null}
          </li>
        ))}
      </ol>
    </Sheet>
  )
}
