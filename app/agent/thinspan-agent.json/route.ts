import { getAgentFile } from '@/lib/data/agent-file'
import { route } from '@/lib/http/route'

export const dynamic = 'force-dynamic'

/** What /agent/thinspan-agent.mjs serves, to compare a download with. */
export const GET = route('agent-file.read', {}, async (call) => {
  const { version, sha256, bytes } = await getAgentFile(call, null)
  return { version, sha256, bytes: bytes.length }
})
