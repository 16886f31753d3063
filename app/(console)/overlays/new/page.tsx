import type { Metadata } from 'next'
import { NewOverlayForm } from '@/components/overlays/new-overlay-form'
import { EmptyState, LinkButton, PageHeading, ProblemState } from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import { listTeams } from '@/lib/data'
import { page } from '@/lib/http'
import { createOverlayAction } from './actions'

export const metadata: Metadata = { title: 'New overlay' }

export default async function NewOverlayPage() {
  const teams = await page('team.list', listTeams)
  if (!teams.ok) return <ProblemState problem={teams.problem} />
  const may = teams.value.filter((t) => roleReaches(t.role, 'operator'))
  return (
    <>
      <PageHeading title="New overlay">
        What Thinspan should know before the first agent joins. Pace and disclosure are handed to agents as
        they join.
      </PageHeading>
      {may.length > 0 ? (
        <NewOverlayForm teams={may} create={createOverlayAction} />
      ) : (
        <EmptyState
          title="Overlays are created by operators and owners."
          actions={<LinkButton href="/overlays">Go to the overlays</LinkButton>}
        >
          You are a viewer in your teams. Ask an owner for another role.
        </EmptyState>
      )}
    </>
  )
}
