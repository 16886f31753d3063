import type { Metadata } from 'next'
import { Suspense } from 'react'
import { z } from 'zod'
import { PageHeading } from '@/components/ui'
import { TeamSheets, TeamSkeleton } from './team-sheets'

export const metadata: Metadata = { title: 'Team' }

const searchSchema = z.object({ team: z.string().optional().catch(undefined) })

export default async function TeamPage({ searchParams }: { searchParams: Promise<unknown> }) {
  const { team } = searchSchema.parse(await searchParams)
  return (
    <>
      <PageHeading title="Team">
        Who may see and change what. Every change here is in the audit log.
      </PageHeading>
      <Suspense key={team} fallback={<TeamSkeleton />}>
        <TeamSheets team={team} />
      </Suspense>
    </>
  )
}
