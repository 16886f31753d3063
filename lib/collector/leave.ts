import { OverlaySchema } from '@/entities'
import { authorise, type Call } from '@/lib/http/call'
import type { LeaveReply, LeaveRequest } from '@/lib/protocol'
import { callingAgent } from './agent-caller'
import { endAgent } from './end-agent'
import { eventOf } from './said'

/** The agent says goodbye: it is not counted any more, its key is good for nothing, its name is free. */
export async function leaveOverlay(call: Call, { reason }: LeaveRequest): Promise<LeaveReply> {
  const { agentId, overlayId, teamId, name } = callingAgent(call)
  authorise(call, 'agent.leave', teamId)
  const { slug } = await call.em.findOneOrFail(OverlaySchema, overlayId)
  call.note({ subject: `${slug}: ${name}`, data: reason === '' ? {} : { reason } })
  const why = reason === '' ? [] : [{ of: name, text: `: ${reason}` }]
  await endAgent(
    call.em,
    { id: agentId, overlayId },
    'left',
    eventOf('agent-left', [{ node: name }, ' left', ...why]),
  )
  return { leftAt: call.now.toISOString() }
}
