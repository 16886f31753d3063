import type { Metadata } from 'next'
import { ProblemState } from '@/components/ui'
import { Warnings } from '@/components/warnings/warnings'
import { getOverlay } from '@/lib/data'
import { page } from '@/lib/http'
import {
  addRuleAction,
  changeRuleAction,
  createWindowAction,
  endWindowAction,
  removeRuleAction,
} from './actions'

export const metadata: Metadata = { title: 'Warnings' }

export default async function WarningsPage({ params }: { params: Promise<{ slug: string }> }) {
  const { slug } = await params
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), slug)
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  return (
    <Warnings
      slug={slug}
      role={overlay.value.role}
      actions={{
        add: addRuleAction,
        change: changeRuleAction,
        remove: removeRuleAction,
        createWindow: createWindowAction,
        endWindow: endWindowAction,
      }}
    />
  )
}
