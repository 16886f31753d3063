import type { Metadata } from 'next'
import { Suspense } from 'react'
import { z } from 'zod'
import { PageHeading } from '@/components/ui'
import { TellingSheets, TellingSkeleton } from './telling-sheets'

export const metadata: Metadata = { title: 'Telling' }

const searchSchema = z.object({ team: z.string().optional().catch(undefined) })

export default async function TellingPage({ searchParams }: { searchParams: Promise<unknown> }) {
  const { team } = searchSchema.parse(await searchParams)
  return (
    <>
      <PageHeading title="Telling">Who is told of a warning, by what, and who next.</PageHeading>
      <Suspense key={team} fallback={<TellingSkeleton />}>
        <TellingSheets team={team} />
      </Suspense>
    </>
  )
}
