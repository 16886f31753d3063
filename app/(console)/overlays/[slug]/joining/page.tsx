import type { Metadata } from 'next'
import { Joining } from '@/components/joining/joining'
import { PageHeading, ProblemState } from '@/components/ui'
import { listJoiningCodes } from '@/lib/data'
import { page } from '@/lib/http'
import { createJoiningCodeAction, revokeJoiningCodeAction } from './actions'
import { readExample } from './example'

export const metadata: Metadata = { title: 'Joining' }

export default async function JoiningPage({ params }: { params: Promise<{ slug: string }> }) {
  const { slug } = await params
  const codes = await page('joining-code.list', (call) => listJoiningCodes(call, slug), slug)
  if (!codes.ok) {
    return (
      <>
        <PageHeading title="Joining" />
        <ProblemState problem={codes.problem} />
      </>
    )
  }
  return (
    <Joining
      slug={slug}
      create={createJoiningCodeAction}
      revoke={revokeJoiningCodeAction}
      nodeVersion={process.versions.node}
      example={await readExample()}
    />
  )
}
