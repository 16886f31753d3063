import { z } from 'zod'
import { getAgentFile } from '@/lib/data/agent-file'
import { route } from '@/lib/http/route'

export const dynamic = 'force-dynamic'

const query = z.object({ version: z.string().min(1).max(40).optional() })

/** The agent as one file; with `version` one that was current before. */
export const GET = route('agent-file.read', { query }, async (call, { query: { version }, request }) => {
  const file = await getAgentFile(call, version ?? null)
  const etag = `"${file.sha256}"`
  const headers = {
    etag,
    'cache-control': 'no-cache',
    'content-type': 'text/javascript; charset=utf-8',
    'content-disposition': 'attachment; filename="thinspan-agent.mjs"',
    // RFC 9530.
    'repr-digest': `sha-256=:${Buffer.from(file.sha256, 'hex').toString('base64')}:`,
    'x-thinspan-version': file.version,
  }
  const known = request.headers.get('if-none-match')?.split(/\s*,\s*/) ?? []
  if (known.some((tag) => tag.replace(/^W\//, '') === etag))
    return new Response(null, { status: 304, headers })
  return new Response(file.bytes, { headers: { ...headers, 'content-length': String(file.bytes.length) } })
})
