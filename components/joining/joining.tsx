'use client'

import { useState } from 'react'
import { useJoiningCodes } from '@/components/live/hooks'
import { PageHeading, Sheet } from '@/components/ui'
import type { CreatedJoiningCode } from '@/lib/data/dto'
import { Arrivals } from './arrivals'
import { CodesTable } from './codes-table'
import { Commands } from './commands'
import { CreatedCode } from './created-code'
import { NewCode } from './new-code'
import type { CreateCode, RevokeCode } from './types'

export function Joining({ slug, create, revoke }: { slug: string; create: CreateCode; revoke: RevokeCode }) {
  const [created, setCreated] = useState<CreatedJoiningCode | null>(null)
  const codes = useJoiningCodes(slug)
  return (
    <>
      <PageHeading
        title="Joining"
        actions={
          <NewCode
            slug={slug}
            create={create}
            onCreated={(code) => {
              setCreated(code)
              codes.retry()
            }}
          />
        }
      >
        An agent joins with a code, makes a key of its own and from then on proves itself with that key.
      </PageHeading>
      <div className="space-y-5">
        {created ? <CreatedCode code={created} onDone={() => setCreated(null)} /> : null}
        <Sheet heading="Joining codes">
          <CodesTable slug={slug} revoke={revoke} />
        </Sheet>
        <Sheet heading="Agents" aside="as they enrol">
          <Arrivals slug={slug} />
        </Sheet>
        {created ? null : (
          <Sheet heading="Commands" aside="with a code made above">
            <Commands code={null} />
          </Sheet>
        )}
      </div>
    </>
  )
}
