import type { Metadata } from 'next'
import { Partners } from '@/components/partners/partners'
import { ProblemState } from '@/components/ui'
import { getOverlay } from '@/lib/data'
import { page } from '@/lib/http'
import { changePartAction, endPartnershipAction, inviteAction, withdrawAction } from './actions'

export const metadata: Metadata = { title: 'Partners' }

export default async function PartnersPage({ params }: { params: Promise<{ slug: string }> }) {
  const { slug } = await params
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), slug)
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  return (
    <Partners
      slug={slug}
      actions={{
        invite: inviteAction,
        withdraw: withdrawAction,
        change: changePartAction,
        end: endPartnershipAction,
      }}
    />
  )
}
