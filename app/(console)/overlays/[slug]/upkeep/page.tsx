import type { Metadata } from 'next'
import { ProblemState } from '@/components/ui'
import { Upkeep } from '@/components/upkeep/upkeep'
import { getOverlay } from '@/lib/data'
import { page } from '@/lib/http'
import {
  haltUpgradeAction,
  offerUpgradeAction,
  rotateSigningKeyAction,
  setRetireAfterAction,
} from './actions'

export const metadata: Metadata = { title: 'Upkeep' }

export default async function UpkeepPage({ params }: { params: Promise<{ slug: string }> }) {
  const { slug } = await params
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), slug)
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  return (
    <Upkeep
      slug={slug}
      role={overlay.value.role}
      isOwning={overlay.value.standing !== 'partner'}
      actions={{
        offer: offerUpgradeAction,
        halt: haltUpgradeAction,
        retireAfter: setRetireAfterAction,
        rotateKey: rotateSigningKeyAction,
      }}
    />
  )
}
