import type { ReactNode } from 'react'
import { LiveProvider } from '@/components/live/live-provider'

export default async function OverlayLayout(props: {
  children: ReactNode
  params: Promise<{ slug: string }>
}) {
  const { slug } = await props.params
  return (
    <LiveProvider key={slug} slug={slug}>
      {props.children}
    </LiveProvider>
  )
}
