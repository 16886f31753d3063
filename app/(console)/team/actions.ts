'use server'

import { revalidatePath } from 'next/cache'
import { z } from 'zod'
import { addMember, changeRole, newMemberLink, removeMember } from '@/lib/data'
import { newMemberSchema, ROLES } from '@/lib/data/dto'
import { action } from '@/lib/http'

const after = () => revalidatePath('/team')
const memberSchema = z.object({ memberId: z.uuid() })

export const addMemberAction = action(
  'member.add',
  newMemberSchema.extend({ team: z.string() }),
  (call, input) => addMember(call, input),
  { after },
)

export const newMemberLinkAction = action(
  'member.link',
  memberSchema,
  (call, { memberId }) => newMemberLink(call, memberId),
  { after },
)

export const changeRoleAction = action(
  'member.change-role',
  memberSchema.extend({ role: z.enum(ROLES) }),
  (call, input) => changeRole(call, input),
  { after },
)

export const removeMemberAction = action(
  'member.remove',
  memberSchema,
  (call, { memberId }) => removeMember(call, memberId),
  { after },
)
