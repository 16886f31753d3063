'use client'

import { useState } from 'react'
import { useJoiningCodes } from '@/components/live/hooks'
import { Coverage } from '@/components/now/coverage'
import { PageHeading, Sheet } from '@/components/ui'
import type { CreatedJoiningCode } from '@/lib/data/dto'
import { Arrivals } from './arrivals'
import { CodesTable } from './codes-table'
import { CreatedCode } from './created-code'
import { NewCode } from './new-code'
import type { CreateCode, JoiningExample, RevokeCode } from './types'
import { Ways } from './ways'

export interface JoiningProps {
  slug: string
  create: CreateCode
  revoke: RevokeCode
  nodeVersion: string
  example: JoiningExample
}

export function Joining({ slug, create, revoke, nodeVersion, example }: JoiningProps) {
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
        <Coverage slug={slug} />
        {created ? <CreatedCode code={created} onDone={() => setCreated(null)} /> : null}
        <Ways code={created?.code ?? null} nodeVersion={nodeVersion} example={example} />
        <Sheet heading="Agents" aside="as they enrol">
          <Arrivals slug={slug} />
        </Sheet>
        <Sheet heading="Joining codes">
          <CodesTable slug={slug} revoke={revoke} />
        </Sheet>
      </div>
    </>
  )
}
