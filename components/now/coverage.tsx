'use client'

import { useReading } from '@/components/live/hooks'
import { coverageMeaning, coverageParts } from '@/lib/face/coverage'
import { cx } from '@/lib/face/cx'
import { linkKindWords } from '@/lib/face/link-kind'
import { answerText } from '@/lib/face/settling'

/** What the reading rests on, on every page of an overlay; nothing before an agent has joined. */
export function Coverage({ slug, className }: { slug: string; className?: string }) {
  const reading = useReading(slug)
  if (!reading.data || reading.data.coverage.joined === 0) return null
  const meaning = coverageMeaning(reading.data)
  const answer = answerText(reading.data.answersInMs)
  const kind = linkKindWords(reading.data.linkKind)
  return (
    <section aria-label="Coverage" className={cx('border-y border-hairline py-2.5', className)}>
      <ul className="flex flex-wrap gap-x-6 gap-y-0.5">
        {coverageParts(reading.data).map(({ id, text, grave, strong }) => (
          <li
            key={id}
            className={cx(
              (grave || strong) && 'font-semibold',
              grave ? 'text-vermilion' : !strong && 'text-soft',
            )}
          >
            {text}
          </li>
        ))}
      </ul>
      {meaning ? <p className="mt-1 max-w-5xl text-sm text-soft">{meaning}</p> : null}
      {answer ? <p className="mt-1 max-w-5xl text-sm text-soft">{answer}</p> : null}
      {kind ? (
        <p className="mt-1 max-w-5xl text-sm text-soft">
          <span className="text-ink">Measured: {kind.short}.</span> {kind.sentence}
        </p>
      ) : null}
    </section>
  )
}
