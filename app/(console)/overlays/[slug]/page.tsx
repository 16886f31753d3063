import type { Metadata } from 'next'
import { Now } from '@/components/now/now'
import { ProblemState } from '@/components/ui'
import { getOverlay } from '@/lib/data'
import { page } from '@/lib/http'

export const metadata: Metadata = { title: 'Now' }

export default async function NowPage({ params }: { params: Promise<{ slug: string }> }) {
  const { slug } = await params
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), slug)
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  return <Now slug={slug} />
}
