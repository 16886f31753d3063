import { agentOfSession } from '@/lib/collector/agent-caller'
import { readDirectory } from '@/lib/collector/directory'
import { isUnchanged } from '@/lib/http/etag'
import { route } from '@/lib/http/route'

export const GET = route(
  'agent.directory',
  { authenticate: (em, { facts }) => agentOfSession(em, facts.bearer) },
  async (call, { request }) => {
    const { json, etag } = await readDirectory(call)
    const headers = { etag, 'cache-control': 'private, no-cache' }
    if (isUnchanged(request, etag)) return new Response(null, { status: 304, headers })
    return new Response(json, { headers: { ...headers, 'content-type': 'application/json' } })
  },
)
