import { FailedState, LinkButton, Sheet, Waiting } from '@/components/ui'
import { type AuditFilter, listAudit } from '@/lib/data'
import { page } from '@/lib/http'
import { TeamChoice } from '../team/team-choice'
import { AuditFilterForm } from './audit-filter-form'
import { AuditTable } from './audit-table'

export async function AuditSheet({ filter }: { filter: AuditFilter }) {
  const result = await page('audit.read', (call) => listAudit(call, filter), filter)
  if (!result.ok)
    return (
      <FailedState
        title={result.problem.title}
        actions={<LinkButton href="/overlays">Go to the overlays</LinkButton>}
      >
        {result.problem.detail}
      </FailedState>
    )
  const { team, items, next } = result.value
  const filtered = Boolean(filter.text || filter.action || filter.outcome)
  return (
    <>
      <TeamChoice path="/audit" chosen={team.slug} />
      <Sheet heading={team.name} aside="Newest first">
        <AuditFilterForm filter={filter} team={team.slug} />
        <AuditTable items={items} filtered={filtered} teamSlug={team.slug} />
        <nav aria-label="Pages of the log" className="mt-4 flex flex-wrap gap-2">
          {filter.before ? (
            <LinkButton href={address(filter, team.slug, null)}>Newest entries</LinkButton>
          ) : null}
          {next ? <LinkButton href={address(filter, team.slug, next)}>Earlier entries</LinkButton> : null}
        </nav>
      </Sheet>
    </>
  )
}

export function AuditSkeleton() {
  return <Waiting label="The audit log is being loaded." className="h-96" />
}

function address({ text, action, outcome }: AuditFilter, team: string, before: string | null): string {
  const query = new URLSearchParams({ team })
  for (const [name, value] of Object.entries({ text, action, outcome, before }))
    if (value) query.set(name, value)
  return `/audit?${query}`
}
