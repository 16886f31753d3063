import { PACES } from '@/lib/method/pace'
import { describeCollectorError } from '../collector/client'
import type { AgentConfig } from '../config'
import { EXIT, type ExitCode } from '../exit-codes'
import { type CommandComponents, configOr } from './components'
import type { Options } from './options'
import { contactOf, exitOf } from './session'
import { type RunningStatus, runningStatusSchema, statusLines } from './status-lines'

const ASK_MS = 3_000
const MAX_STATUS_BYTES = 16 * 1024 * 1024

/** Where the agent that runs can be asked it is; else what is configured, and what the collector says. */
export async function statusCommand(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  const { say } = components
  const config = await configOr(components, options)
  if (!config) return EXIT.config
  const metrics = options.listenMetrics ?? config.listenMetrics
  const running = metrics && (await askRunning(components, metrics, signal))
  const { reporter } = await contactOf(components, config)
  const session = await reporter.check(signal)
  const problem = session.ok ? null : describeCollectorError(session.error)
  const status = {
    ...publicPart(config),
    collector: {
      address: config.collector,
      knowsThisAgent: session.ok,
      problem,
      clockSkewMs: session.ok ? Math.round(reporter.skewMs) : null,
    },
    running,
  }
  if (options.json) say(JSON.stringify(status))
  else for (const line of statusLines(status, metrics !== null)) say(line)
  return session.ok ? EXIT.ok : exitOf(session.error)
}

/** Without keys and passes. */
function publicPart(config: AgentConfig) {
  const { agentId, name, overlay, pace, labels, listen, address, neighbours, passExpiresAt } = config
  const { node, source, agentsAt, listenMetrics, spool, upgrades } = config
  return {
    agentId,
    name,
    overlay,
    pace: { name: pace, ...PACES[pace] },
    labels,
    listen,
    address,
    node,
    neighbours,
    source,
    agentsAt,
    listenMetrics,
    spool,
    upgrades,
    keyRing: config.keyRing?.version ?? 1,
    passExpiresAt,
  }
}

async function askRunning(
  { createPost, clock }: CommandComponents,
  { host, port }: { host: string; port: number },
  signal: AbortSignal,
): Promise<RunningStatus | null> {
  const abort = new AbortController()
  const onAbort = () => abort.abort()
  const cancel = clock.after(ASK_MS, onAbort)
  signal.addEventListener('abort', onAbort, { once: true })
  const local = host === '0.0.0.0' ? '127.0.0.1' : host === '::' ? '::1' : host
  try {
    const url = new URL(`http://${local.includes(':') ? `[${local}]` : local}:${port}/status`)
    const reply = await createPost({})(url, {
      method: 'GET',
      headers: { accept: 'application/json' },
      body: '',
      signal: abort.signal,
      maxReplyBytes: MAX_STATUS_BYTES,
    })
    const parsed = runningStatusSchema.safeParse(reply.text === null ? null : JSON.parse(reply.text))
    return parsed.success ? parsed.data : null
  } catch {
    return null
  } finally {
    cancel()
    signal.removeEventListener('abort', onAbort)
  }
}

export type StatusReport = ReturnType<typeof publicPart> & {
  collector: { address: string; knowsThisAgent: boolean; problem: string | null; clockSkewMs: number | null }
  running: RunningStatus | null
}
