import { PACES } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import { generateKeys, type KeyPair, keysFromPem, pemOf } from '@/lib/protocol'
import { createAgent } from '../agent'
import type { Clock } from '../clock'
import { describeCollectorError, mayRetry } from '../collector/client'
import { createHttpCollector } from '../collector/http-client'
import type { Post } from '../collector/post'
import { Reporter } from '../collector/reporter'
import { type AgentConfig, dropDraft, readConfig, renewPass, writeConfig } from '../config'
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
  const draft = await draftOr(components, options)
  if (!draft.ok) return draft.exit
  const { keys } = draft
  const { post, clock, version } = components
  const client = createHttpCollector({ post, clock }, { baseUrl: collector })
  const address = options.address ?? addressOf(options)
  const result = await enrol(
    { collector: client, keys },
    { code, name, labels: options.labels, address, version },
    signal,
  )
  if (!result.ok) {
    const isRefused = result.error.code === 'refused'
    const sentences = [`Not enrolled: ${describeCollectorError(result.error)}`]
    // Without an answer the code may be used up, for this key: trying again with it gets the answer that was lost.
    if (!isRefused) sentences.push(`${options.config} keeps the key: the same command tries again with it.`)
    else if (draft.isNew) await dropDraft(options.config)
    else sentences.push(`${options.config} still holds the key of before: remove it to enrol with another.`)
    components.complain(sentences.join('\n'))
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
  try {
    await writeConfig(options.config, config, { replace: true })
  } catch (error) {
    components.complain(
      `${options.config} cannot be completed: ${reasonOf(error)}. It keeps the key: enrol once more when that is mended.`,
    )
    return EXIT.config
  }
  components.say(`Enrolled as ${name} in ${overlay.name}. Configuration: ${options.config}`)
  return EXIT.ok
}

type DraftResult = { ok: true; keys: KeyPair; isNew: boolean } | { ok: false; exit: ExitCode }

/** Keeps the key where the configuration will be, so that no code is used up for one that cannot be written. */
async function draftOr({ complain }: CommandComponents, { config: path }: Options): Promise<DraftResult> {
  const keys = generateKeys()
  try {
    if (await writeConfig(path, { privateKey: pemOf(keys.privateKey) }, { replace: false }))
      return { ok: true, keys, isNew: true }
  } catch (error) {
    complain(`${path} cannot be written: ${reasonOf(error)}. The joining code was not used.`)
    return { ok: false, exit: EXIT.config }
  }
  const present = await readConfig(path)
  if (!present.ok && present.error.code === 'unfinished')
    return { ok: true, keys: keysFromPem(present.error.draft.privateKey), isNew: false }
  complain(`${path} is there already. Move it away to enrol anew, or give another --config.`)
  return { ok: false, exit: EXIT.alreadyEnrolled }
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
  let kept = Promise.resolve()
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
        // So that links open after a restart while the collector is away. One after the other: the last one stays.
        kept = kept.then(async () => {
          const reason = await renewPass(options.config, config.agentId, grant).catch(reasonOf)
          if (reason !== null) logger.warn({ reason }, 'the renewed pass could not be kept')
        })
      },
    },
  )
  try {
    await agent.start()
  } catch (error) {
    components.complain(`Cannot listen: ${reasonOf(error)}`)
    await agent.stop()
    return EXIT.listen
  }
  await aborted(signal)
  await agent.stop()
  await kept
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
  else if (error.code === 'unfinished')
    complain(
      `${options.config} was begun by an enrolment that did not finish. Enrol again, with the same --config.`,
    )
  else if (error.code === 'unreadable') complain(`${options.config} cannot be read: ${error.reason}`)
  else complain(`${options.config} is no agent's configuration: ${error.issue}`)
  return null
}

const reasonOf = (error: unknown): string => (error instanceof Error ? error.message : String(error))

function aborted(signal: AbortSignal): Promise<void> {
  if (signal.aborted) return Promise.resolve()
  return new Promise((resolve) => signal.addEventListener('abort', () => resolve(), { once: true }))
}
