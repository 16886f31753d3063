import type { Metadata } from 'next'
import { Reinforcement } from '@/components/reinforcement/reinforcement'
import { ProblemState } from '@/components/ui'
import { getOverlay } from '@/lib/data'
import { page } from '@/lib/http'
import { markJoinedAction, planLinkAction, withdrawLinkAction } from './actions'

export const metadata: Metadata = { title: 'Reinforcement' }

export default async function ReinforcementPage({ params }: { params: Promise<{ slug: string }> }) {
  const { slug } = await params
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), slug)
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  return (
    <Reinforcement
      slug={slug}
      role={overlay.value.role}
      actions={{ plan: planLinkAction, markJoined: markJoinedAction, withdraw: withdrawLinkAction }}
    />
  )
}
