import { PACES } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import { generateKeys, keysFromPem, pemOf } from '@/lib/protocol'
import { createAgent } from '../agent'
import type { Clock } from '../clock'
import { describeCollectorError, mayRetry } from '../collector/client'
import { createHttpCollector } from '../collector/http-client'
import type { Post } from '../collector/post'
import { Reporter } from '../collector/reporter'
import { type AgentConfig, readConfig, writeConfig } from '../config'
import { enrol } from '../enrol'
import { EXIT, type ExitCode } from '../exit-codes'
import type { Logger } from '../logger'
import { createWsTransport } from '../transport/ws'
import type { Options } from './options'

export interface CommandComponents {
  clock: Clock
  random: Random
  randomBytes: (count: number) => Uint8Array
  post: Post
  logger: Logger
  /** One line for the person or program that called. */
  say: (line: string) => void
  complain: (line: string) => void
  version: string
}

export async function enrolCommand(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  const { collector, code, name } = options
  if (collector === null || code === null || name === null) {
    components.complain('enrol needs --collector, --code and --name.')
    return EXIT.usage
  }
  const present = await readConfig(options.config)
  if (present.ok || present.error.code !== 'missing') {
    components.complain(
      `${options.config} is there already. Move it away to enrol anew, or give another --config.`,
    )
    return EXIT.alreadyEnrolled
  }
  const keys = generateKeys()
  const { post, clock, version } = components
  const client = createHttpCollector({ post, clock }, { baseUrl: collector })
  const address = options.address ?? addressOf(options)
  const result = await enrol(
    { collector: client, keys },
    { code, name, labels: options.labels, address, version },
    signal,
  )
  if (!result.ok) {
    components.complain(`Not enrolled: ${describeCollectorError(result.error)}`)
    return result.error.code === 'refused' && !mayRetry(result.error) ? EXIT.refused : EXIT.unreachable
  }
  const { agentId, overlay, overlayKey, pace, weights, pass, passExpiresAt } = result.value
  const config: AgentConfig = {
    collector,
    agentId,
    name,
    overlay,
    overlayKey,
    weights,
    pace,
    labels: options.labels,
    listen: options.listen,
    address,
    neighbours: options.neighbours,
    pass,
    passExpiresAt,
    privateKey: pemOf(keys.privateKey),
  }
  if (!(await writeConfig(options.config, config, { replace: false }))) {
    components.complain(`${options.config} appeared meanwhile and was left as it is.`)
    return EXIT.alreadyEnrolled
  }
  components.say(`Enrolled as ${name} in ${overlay.name}. Configuration: ${options.config}`)
  return EXIT.ok
}

/** ws://host:port of --listen, unless it listens on every address or on any port: that is no place to dial. */
function addressOf({ listen }: Options): string | null {
  if (!listen || listen.port === 0 || listen.host === '0.0.0.0' || listen.host === '::') return null
  return `ws://${listen.host.includes(':') ? `[${listen.host}]` : listen.host}:${listen.port}`
}

export async function runCommand(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  const config = await configOr(components, options)
  if (!config) return EXIT.config
  const { clock, random, randomBytes, post, logger, version } = components
  let kept = config
  const agent = createAgent(
    {
      transport: createWsTransport({ clock }),
      collector: createHttpCollector({ post, clock }, { baseUrl: config.collector }),
      clock,
      random,
      logger,
      keys: keysFromPem(config.privateKey),
      randomBytes,
    },
    {
      identity: {
        agentId: config.agentId,
        overlayId: config.overlay.id,
        overlayKey: config.overlayKey,
        pass: config.pass,
        weights: config.weights,
      },
      version,
      pace: config.pace,
      listen: options.listen ?? config.listen,
      neighbours: [...new Set([...config.neighbours, ...options.neighbours])].map((address) => ({ address })),
      onPass: (grant) => {
        kept = { ...kept, ...grant }
        // So that links open after a restart while the collector is away.
        writeConfig(options.config, kept, { replace: true }).catch((error: unknown) =>
          logger.warn({ reason: String(error) }, 'the renewed pass could not be kept'),
        )
      },
    },
  )
  try {
    await agent.start()
  } catch (error) {
    components.complain(`Cannot listen: ${error instanceof Error ? error.message : String(error)}`)
    await agent.stop()
    return EXIT.listen
  }
  await aborted(signal)
  await agent.stop()
  return EXIT.ok
}

export async function statusCommand(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  const config = await configOr(components, options)
  if (!config) return EXIT.config
  const { clock, randomBytes, post } = components
  const reporter = new Reporter(
    {
      client: createHttpCollector({ post, clock }, { baseUrl: config.collector }),
      clock,
      keys: keysFromPem(config.privateKey),
      randomBytes,
    },
    { agentId: config.agentId, onPass: () => {}, onSession: () => {} },
  )
  const session = await reporter.check(signal)
  const { collector, agentId, name, overlay, pace, labels, listen, address, neighbours, passExpiresAt } =
    config
  components.say(
    JSON.stringify({
      agentId,
      name,
      overlay,
      collector: {
        address: collector,
        knowsThisAgent: session.ok,
        problem: session.ok ? null : describeCollectorError(session.error),
        clockSkewMs: session.ok ? Math.round(reporter.skewMs) : null,
      },
      pace: { name: pace, ...PACES[pace] },
      labels,
      listen,
      address,
      neighbours,
      passExpiresAt,
    }),
  )
  if (session.ok) return EXIT.ok
  return session.error.code === 'refused' ? EXIT.refused : EXIT.unreachable
}

async function configOr({ complain }: CommandComponents, options: Options): Promise<AgentConfig | null> {
  const result = await readConfig(options.config)
  if (result.ok) return result.config
  const { error } = result
  if (error.code === 'missing') complain(`${options.config} is not there. Enrol first, or give --config.`)
  else if (error.code === 'unreadable') complain(`${options.config} cannot be read: ${error.reason}`)
  else complain(`${options.config} is no agent's configuration: ${error.issue}`)
  return null
}

function aborted(signal: AbortSignal): Promise<void> {
  if (signal.aborted) return Promise.resolve()
  return new Promise((resolve) => signal.addEventListener('abort', () => resolve(), { once: true }))
}
