import type { Metadata } from 'next'
import { RehearsalPage } from '@/components/rehearsals/rehearsal-page'
import { ProblemState } from '@/components/ui'
import { getRehearsal } from '@/lib/data'
import { page } from '@/lib/http'
import { cancelRehearsalAction, startRehearsalAction } from '../actions'

export const metadata: Metadata = { title: 'Rehearsal' }

export default async function OneRehearsalPage({
  params,
}: {
  params: Promise<{ slug: string; id: string }>
}) {
  const { slug, id } = await params
  const rehearsal = await page('rehearsal.list', (call) => getRehearsal(call, slug, id), { slug, id })
  if (!rehearsal.ok) return <ProblemState problem={rehearsal.problem} />
  return (
    <RehearsalPage
      key={id}
      slug={slug}
      initial={rehearsal.value}
      actions={{ start: startRehearsalAction, cancel: cancelRehearsalAction }}
    />
  )
}
