import type { Metadata } from 'next'
import { redirect } from 'next/navigation'
import { PageHeading } from '@/components/ui'
import { isFirstRun } from '@/lib/data'
import { page } from '@/lib/http'
import { FirstRunForm } from './first-run-form'

export const metadata: Metadata = { title: 'First run' }

export default async function FirstRunPage() {
  const fresh = await page('first-run.read', isFirstRun)
  if (fresh.ok && !fresh.value) redirect('/sign-in')
  return (
    <>
      <PageHeading title="Set up this server">
        Nobody can sign in yet. The person and the team named here come first: you will be the team’s owner,
        can create overlays and add others.
      </PageHeading>
      <FirstRunForm />
    </>
  )
}
