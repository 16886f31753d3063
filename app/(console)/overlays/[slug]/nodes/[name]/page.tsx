import type { Metadata } from 'next'
import { NodeStoryView } from '@/components/story/node-story'
import { ProblemState } from '@/components/ui'
import { getOverlay } from '@/lib/data'
import { pathPart } from '@/lib/face/urls'
import { page } from '@/lib/http'

interface Props {
  params: Promise<{ slug: string; name: string }>
}

export async function generateMetadata({ params }: Props): Promise<Metadata> {
  return { title: pathPart((await params).name) }
}

export default async function NodePage({ params }: Props) {
  const { slug, name } = await params
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), [slug, name])
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  return <NodeStoryView slug={slug} name={pathPart(name)} />
}
