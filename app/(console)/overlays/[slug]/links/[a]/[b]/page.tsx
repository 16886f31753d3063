import type { Metadata } from 'next'
import { LinkStoryView } from '@/components/story/link-story'
import { ProblemState } from '@/components/ui'
import { getOverlay } from '@/lib/data'
import { formatLink } from '@/lib/face/format'
import { pathPart } from '@/lib/face/urls'
import { page } from '@/lib/http'

interface Props {
  params: Promise<{ slug: string; a: string; b: string }>
}

async function addressed({ params }: Props) {
  const { slug, a, b } = await params
  return { slug, a: pathPart(a), b: pathPart(b) }
}

export async function generateMetadata(props: Props): Promise<Metadata> {
  const { a, b } = await addressed(props)
  return { title: formatLink(a, b) }
}

export default async function LinkPage(props: Props) {
  const { slug, a, b } = await addressed(props)
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), [slug, a, b])
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  return <LinkStoryView slug={slug} a={a} b={b} />
}
