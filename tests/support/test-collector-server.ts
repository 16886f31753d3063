import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import type { CollectorResult } from '@/agent'
import type { AgentProblem } from '@/lib/protocol'
import type { TestCollector } from './test-collector'

/** The same over HTTP on loopback. */
export async function serve(
  collector: TestCollector,
  init: { files?: ReadonlyMap<string, string> } = {},
): Promise<{ url: string; close: () => Promise<void> }> {
  const signal = new AbortController().signal
  const server = createServer(async (request, response) => {
    const chunks: Buffer[] = []
    for await (const chunk of request) chunks.push(chunk)
    const text = Buffer.concat(chunks).toString('utf8')
    const body = text === '' ? null : JSON.parse(text)
    const token = request.headers.authorization?.slice('Bearer '.length) ?? ''
    const answer = (result: CollectorResult<object>) => {
      const problem: AgentProblem | null =
        !result.ok && result.error.code === 'refused' ? result.error.problem : null
      response.writeHead(problem?.status ?? (result.ok ? 200 : 502), { 'content-type': 'application/json' })
      response.end(JSON.stringify(result.ok ? result.value : problem))
    }
    const file = init.files?.get(request.url ?? '')
    if (file !== undefined) return response.writeHead(200).end(file)
    switch (request.url) {
      case '/api/health':
        return response.writeHead(200, { 'content-type': 'application/json' }).end('{}')
      case '/api/agent/enrol':
        return answer(await collector.enrol(body, signal))
      case '/api/agent/session':
        return answer(await collector.session(body, signal))
      case '/api/agent/key':
        return answer(await collector.key(body, signal))
      case '/api/agent/leave':
        return answer(await collector.leave(body, token, signal))
      case '/api/agent/directory': {
        const known = request.headers['if-none-match'] ?? null
        const result = await collector.directory(known, token, signal)
        if (!result.ok) return answer(result)
        const { etag, directory } = result.value
        const headers = { 'content-type': 'application/json', etag: etag ?? '' }
        response.writeHead(directory ? 200 : 304, headers)
        return response.end(directory ? JSON.stringify(directory) : undefined)
      }
      default:
        return answer(await collector.report(body, token, signal))
    }
  })
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  const { port } = server.address() as AddressInfo
  return {
    url: `http://127.0.0.1:${port}`,
    close: async () => {
      server.closeAllConnections()
      await new Promise((resolve) => server.close(resolve))
    },
  }
}
