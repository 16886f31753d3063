import { FailedState, Note, Sheet, Waiting } from '@/components/ui'
import { listMembers } from '@/lib/data'
import { page } from '@/lib/http'
import { AddMemberForm } from './add-member-form'
import { MembersTable } from './members-table'
import { TeamChoice } from './team-choice'

export async function TeamSheets({ team }: { team: string | undefined }) {
  const result = await page('member.list', (call) => listMembers(call, team))
  if (!result.ok) return <FailedState title={result.problem.title}>{result.problem.detail}</FailedState>
  const { members, role, team: shown } = result.value
  const people = members.length === 1 ? '1 person' : `${members.length} people`
  return (
    <div className="space-y-6">
      <TeamChoice path="/team" chosen={shown.slug} />
      <Sheet heading={shown.name} aside={people}>
        <MembersTable members={members} manages={role === 'owner'} teamSlug={shown.slug} />
      </Sheet>
      {role === 'owner' ? (
        <Sheet heading="Add a person">
          <AddMemberForm team={shown.slug} />
        </Sheet>
      ) : (
        <Note>
          Owners of the team add people and change roles. You are{' '}
          {role === 'operator' ? 'an operator' : 'a viewer'}.
        </Note>
      )}
    </div>
  )
}

export function TeamSkeleton() {
  return <Waiting label="The team is being loaded." className="h-72" />
}
