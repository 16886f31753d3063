'use client'

import { Lambda, Note, Sheet, SideMark } from '@/components/ui'
import type { WeakPlace } from '@/lib/data/weak-dto'
import { formatCount, formatHigh, formatReading } from '@/lib/face/format'
import { cheegerSentence, runnerUpSentence } from '@/lib/face/weak'

/** Sizes of the sides, what follows from them, and the next place. */
export function CutFigures({ place }: { place: WeakPlace }) {
  const { sides, crossing, figures } = place
  if (!sides || !crossing || !figures) return null
  const cheeger = cheegerSentence(place)
  const volume = (side: (typeof sides)[number]) =>
    side.volume === null ? '' : `, ${formatReading(side.volume)} weight on their links`
  return (
    <Sheet heading="The cut in figures">
      <dl>
        <Row label={<SideMark side="a" />}>{`${formatCount(sides[0].nodes, 'node')}${volume(sides[0])}`}</Row>
        <Row label={<SideMark side="b" />}>{`${formatCount(sides[1].nodes, 'node')}${volume(sides[1])}`}</Row>
        <Row label="crossing">{`${formatCount(crossing.links, 'link')}, ${formatReading(crossing.weight)} weight`}</Row>
        <Row label="conductance">
          {figures.conductance === null
            ? 'not known: it takes the weight on every node’s links'
            : `${formatReading(figures.conductance)} of the weight on the links of the lighter side crosses`}
        </Row>
        <Row label="per node">
          {figures.expansion === null
            ? 'not known'
            : `${formatReading(figures.expansion)} crossing weight for each node of the smaller side`}
        </Row>
        {figures.lambda2AtMost === null ? null : (
          <Row
            label={
              <>
                <Lambda n={2} /> by size
              </>
            }
          >
            {`at most ${formatHigh(figures.lambda2AtMost)} while this cut is as it is, whatever else is linked`}
          </Row>
        )}
      </dl>
      <h3 className="mt-5 mb-1 text-base">How weak it can be</h3>
      <p>{cheeger ?? 'Nothing is proven without a reading.'}</p>
      <h3 className="mt-5 mb-1 text-base">The next place</h3>
      <p>{runnerUpSentence(place)}</p>
      <Note className="mt-4">
        Cheeger’s inequality for the combinatorial Laplacian, from both ends of the reading’s interval. The
        cut is the best of nine along the Fiedler values, not of all there are.
      </Note>
    </Sheet>
  )
}

function Row({ label, children }: { label: React.ReactNode; children: string }) {
  return (
    <div className="flex gap-4 border-t border-hairline py-1.5">
      <dt className="w-24 shrink-0 text-sm leading-6 text-soft sm:w-28">{label}</dt>
      <dd className="min-w-0 wrap-anywhere">{children}</dd>
    </div>
  )
}
