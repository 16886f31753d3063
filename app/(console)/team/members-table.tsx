'use client'

import { useState } from 'react'
import { Button, type Column, ConfirmDialog, DataTable, EmptyState, Outcome, Time } from '@/components/ui'
import type { Member } from '@/lib/data/dto'
import { submit } from '@/lib/http/form-state'
import { newMemberLinkAction, removeMemberAction } from './actions'
import { PasswordLinkBlock } from './password-link-block'
import { RoleForm } from './role-form'
import { ROLE_WORDS } from './roles'

export interface MembersTableProps {
  members: Member[]
  /** The reader may change things. */
  manages: boolean
  teamSlug: string
}

type Shown = { link: { name: string; url: string; expiresAt: string } } | { failed: string } | null

export function MembersTable({ members, manages, teamSlug }: MembersTableProps) {
  const [shown, setShown] = useState<Shown>(null)
  const columns = [...DATA_COLUMNS, ...(manages ? [roleColumn, actionsColumn(setShown)] : [])]
  return (
    <div className="space-y-4">
      {shown && 'link' in shown ? <PasswordLinkBlock {...shown.link} /> : null}
      {shown && 'failed' in shown ? <Outcome ok={false}>{shown.failed}</Outcome> : null}
      <DataTable
        caption="People in the team"
        columns={columns}
        rows={members}
        rowKey={(member) => member.id}
        stacks
        csvName={`team-${teamSlug}`}
        initialSort={{ id: 'name' }}
        search="Find a person"
        empty={<EmptyState title="Nobody is in this team." />}
      />
    </div>
  )
}

const DATA_COLUMNS: Column<Member>[] = [
  {
    id: 'name',
    header: 'Name',
    value: (member) => member.name,
    cell: (member) => (
      <>
        {member.name}
        {member.you ? <span className="text-soft"> (you)</span> : null}
      </>
    ),
  },
  { id: 'email', header: 'E-mail address', value: (member) => member.email },
  { id: 'role', header: 'Role', value: (member) => ROLE_WORDS[member.role].label },
  {
    id: 'password',
    header: 'Password',
    value: (member) => (member.active ? 'set' : 'not set yet'),
  },
  {
    id: 'added',
    header: 'Added',
    value: (member) => member.addedAt,
    cell: (member) => <Time at={member.addedAt} />,
  },
]

const roleColumn: Column<Member> = {
  id: 'change-role',
  header: 'Change role',
  data: false,
  value: () => null,
  cell: (member) => <RoleForm key={member.role} member={member} />,
}

function actionsColumn(setShown: (shown: Shown) => void): Column<Member> {
  return {
    id: 'actions',
    header: 'Link and removal',
    data: false,
    value: () => null,
    cell: (member) => (
      <div className="flex flex-wrap gap-2">
        <Button
          kind="quiet"
          aria-label={`New set-password link for ${member.name}`}
          onClick={async () => setShown(await newLink(member))}
        >
          New link
        </Button>
        <ConfirmDialog
          label={
            <span>
              Remove<span className="sr-only"> {member.name}</span>
            </span>
          }
          kind="quiet"
          title={`Remove ${member.name} from the team?`}
          confirmLabel={`Remove ${member.name}`}
          keepLabel="Keep"
          disabled={member.lastOwner}
          onConfirm={() => remove(member)}
        >
          <p>
            {member.email} loses access to all overlays of this team at once. The tokens {member.name} made
            for this team stop working and do not come back, even if {member.name} is added again.
          </p>
          <p>{member.name} drops out of the team’s turns, stand-ins and call orders.</p>
          <p>What {member.name} did stays in the audit log.</p>
        </ConfirmDialog>
      </div>
    ),
  }
}

async function newLink(member: Member): Promise<Shown> {
  const state = await submit(newMemberLinkAction, { memberId: member.id })
  if (state.status === 'failed') return { failed: state.problem.detail }
  if (state.status !== 'done' || !state.value.url || !state.value.expiresAt) return null
  const { name, url, expiresAt } = state.value
  return { link: { name, url, expiresAt } }
}

async function remove(member: Member): Promise<string | null> {
  const state = await submit(removeMemberAction, { memberId: member.id })
  return state.status === 'failed' ? state.problem.detail : null
}
