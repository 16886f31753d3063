'use client'

import { useState } from 'react'
import { usePast } from '@/components/live/hooks'
import { StretchSheet } from '@/components/now/stretch-sheet'
import { Stretch } from '@/components/stretch/stretch'
import { Button, FailedState, Note, Sheet, Time, Waiting } from '@/components/ui'

/** The drawing when it was raised and as it is, one at a time: side by side neither could be read. */
export function StretchThenNow({ slug, momentAt }: { slug: string; momentAt: string | null }) {
  const [then, setThen] = useState(momentAt !== null)
  return (
    <div>
      {momentAt === null ? (
        <Note className="mb-3">No drawing is kept of when it was raised; this is the overlay as it is.</Note>
      ) : (
        <fieldset className="mb-3 flex flex-wrap gap-2">
          <legend className="sr-only">Which drawing is shown</legend>
          <Button kind={then ? 'main' : 'plain'} aria-pressed={then} onClick={() => setThen(true)}>
            When it was raised
          </Button>
          <Button kind={then ? 'plain' : 'main'} aria-pressed={!then} onClick={() => setThen(false)}>
            Now
          </Button>
        </fieldset>
      )}
      {then && momentAt !== null ? <Then slug={slug} at={momentAt} /> : <StretchSheet slug={slug} />}
    </div>
  )
}

function Then({ slug, at }: { slug: string; at: string }) {
  const past = usePast(slug, at)
  return (
    <Sheet
      heading="Stretch"
      aside={
        <>
          as it was <Time at={at} show="both" />
        </>
      }
    >
      {past.data ? (
        <Stretch
          nodes={past.data.nodes}
          links={past.data.cut.links}
          reading={past.data.reading}
          cut={past.data.cut}
        />
      ) : past.error ? (
        <FailedState quiet title="The drawing of that moment could not be loaded." onRetry={past.retry}>
          {past.error.message}
        </FailedState>
      ) : (
        <Waiting label="Loading the drawing" className="h-[28rem]" />
      )}
    </Sheet>
  )
}
