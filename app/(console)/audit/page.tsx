import type { Metadata } from 'next'
import { Suspense } from 'react'
import { PageHeading } from '@/components/ui'
import { auditFilterSchema } from '@/lib/data'
import { AuditSheet, AuditSkeleton } from './audit-sheet'

export const metadata: Metadata = { title: 'Audit' }

export default async function AuditPage({ searchParams }: { searchParams: Promise<unknown> }) {
  const filter = auditFilterSchema.catch({}).parse(await searchParams)
  return (
    <>
      <PageHeading title="Audit">
        What was done, by whom, and what was refused. Entries are added by the server alone and cannot be
        changed here.
      </PageHeading>
      <Suspense key={JSON.stringify(filter)} fallback={<AuditSkeleton />}>
        <AuditSheet filter={filter} />
      </Suspense>
    </>
  )
}
