import type { Metadata } from 'next'
import { JoinOverlay } from '@/components/overlays/join-overlay'
import { OverlayList } from '@/components/overlays/overlay-list'
import { EmptyState, LinkButton, PageHeading, ProblemState } from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import { listOverlays, listTeams } from '@/lib/data'
import { page } from '@/lib/http'
import { joinOverlayAction } from './actions'

export const metadata: Metadata = { title: 'Overlays' }

export default async function OverlaysPage() {
  const overlays = await page('overlay.list', listOverlays)
  const teams = await page('team.list', listTeams)
  if (!overlays.ok) return <ProblemState problem={overlays.problem} />
  const own = teams.ok ? teams.value : []
  const mayCreate = own.some((t) => roleReaches(t.role, 'operator'))
  const owned = own.filter((t) => roleReaches(t.role, 'owner'))
  const create = mayCreate ? (
    <>
      {owned.length > 0 ? <JoinOverlay teams={owned} join={joinOverlayAction} /> : null}
      <LinkButton kind="main" href="/overlays/new">
        New overlay
      </LinkButton>
    </>
  ) : null
  return (
    <>
      <PageHeading title="Overlays" actions={overlays.value.length > 0 ? create : null}>
        Each in a sentence: whether it hangs together, and how firmly.
      </PageHeading>
      {overlays.value.length > 0 ? (
        <OverlayList overlays={overlays.value} showTeam={own.length > 1} />
      ) : (
        <EmptyState title="Your teams have no overlay yet." actions={create}>
          {mayCreate
            ? 'Create one, then add an agent beside each of its nodes; or take part in another team’s with an invitation.'
            : 'Overlays are created by operators and owners. Ask one of them.'}
        </EmptyState>
      )}
    </>
  )
}
