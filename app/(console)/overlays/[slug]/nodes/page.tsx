import type { Metadata } from 'next'
import { NodesTable } from '@/components/nodes/nodes-table'
import { Coverage } from '@/components/now/coverage'
import { PageHeading, ProblemState, Sheet } from '@/components/ui'
import { getOverlay } from '@/lib/data'
import { page } from '@/lib/http'
import { readmitNodeAction, retireNodeAction, revokeNodeAction } from './actions'

export const metadata: Metadata = { title: 'Nodes' }

export default async function NodesPage({ params }: { params: Promise<{ slug: string }> }) {
  const { slug } = await params
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), slug)
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  const actions = { retire: retireNodeAction, revoke: revokeNodeAction, readmit: readmitNodeAction }
  return (
    <>
      <PageHeading title="Nodes">
        Every node that has an agent, and what may be known of it. Behind each name is the rest.
      </PageHeading>
      <div className="space-y-5">
        <Coverage slug={slug} />
        <Sheet
          heading={overlay.value.name}
          aside={`${overlay.value.pace} pace · ${overlay.value.disclosure}`}
        >
          <NodesTable slug={slug} actions={actions} />
        </Sheet>
      </div>
    </>
  )
}
