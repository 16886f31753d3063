import type { Metadata } from 'next'
import { ProblemState } from '@/components/ui'
import { WeakPlaceView } from '@/components/weak/weak-place'
import { getOverlay } from '@/lib/data'
import { page } from '@/lib/http'

export const metadata: Metadata = { title: 'Weak place' }

export default async function WeakPlacePage({ params }: { params: Promise<{ slug: string }> }) {
  const { slug } = await params
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), slug)
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  return <WeakPlaceView slug={slug} />
}
