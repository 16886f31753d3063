import { generateKeys, type KeyPair, keysFromPem, pemOf } from '@/lib/protocol'
import { describeCollectorError, mayRetry } from '../collector/client'
import { createHttpCollector } from '../collector/http-client'
import { type AgentConfig, dropDraft, readConfig, writeConfig } from '../config'
import { enrol } from '../enrol'
import { EXIT, type ExitCode } from '../exit-codes'
import { type CommandComponents, reasonOf } from './components'
import type { Options } from './options'
import { tlsOf } from './session'

/** Fit for configuration management: done already under the same name, it changes nothing and succeeds. */
export async function enrolCommand(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  const { collector, code, name } = options
  if (collector === null || name === null) {
    components.complain('enrol needs --collector, and --name where the host has none that will do.')
    return EXIT.usage
  }
  const present = await readConfig(options.config)
  if (present.ok) return enrolledAlready(components, options, present.config)
  if (code === null) {
    components.complain('enrol needs a joining code: --code-file, THINSPAN_CODE or --code.')
    return EXIT.usage
  }
  const tls = await tlsOf(options).catch(reasonOf)
  if (typeof tls === 'string') {
    components.complain(tls)
    return EXIT.config
  }
  const draft = await draftOr(components, options)
  if (!draft.ok) return draft.exit
  const { keys } = draft
  const { clock, version } = components
  const post = components.createPost({ ca: tls?.ca })
  const client = createHttpCollector({ post, clock }, { baseUrl: collector })
  const address = options.address ?? addressOf(options)
  const host = (await components.hostFingerprint()) ?? undefined
  const result = await enrol(
    { collector: client, keys },
    { code, name, labels: options.labels, address, version, node: options.node, host },
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
  const { disclosure, ...reply } = result.value
  const config = { ...configOf(options, reply), collector, name, address, privateKey: pemOf(keys.privateKey) }
  try {
    await writeConfig(options.config, config, { replace: true })
  } catch (error) {
    components.complain(
      `${options.config} cannot be completed: ${reasonOf(error)}. It keeps the key: enrol once more when that is mended.`,
    )
    return EXIT.config
  }
  components.say(
    `Enrolled as ${name} in ${reply.overlay.name} (${disclosure}). Configuration: ${options.config}`,
  )
  return EXIT.ok
}

/** What was said on the command line beside what the collector answered. */
function configOf(
  options: Options,
  reply: Pick<
    AgentConfig,
    'agentId' | 'overlay' | 'overlayKey' | 'pace' | 'weights' | 'pass' | 'passExpiresAt'
  >,
) {
  return {
    ...reply,
    labels: options.labels,
    listen: options.listen,
    neighbours: options.neighbours,
    node: options.node,
    source: options.source,
    agentsAt: options.agentsAt ?? 'as-given',
    listenMetrics: options.listenMetrics,
    spool: options.spool,
    tls: options.tls,
    upgrades: options.upgrades ?? false,
  }
}

function enrolledAlready(
  { say, complain }: CommandComponents,
  options: Options,
  present: AgentConfig,
): ExitCode {
  const isSame =
    present.name === options.name && new URL(present.collector).href === new URL(options.collector ?? '').href
  if (isSame) {
    say(
      `Enrolled already as ${present.name} in ${present.overlay.name}; nothing was changed. Configuration: ${options.config}`,
    )
    return EXIT.ok
  }
  complain(
    `${options.config} is ${present.name}'s at ${present.collector} already. Move it away to enrol anew, or give another --config.`,
  )
  return EXIT.alreadyEnrolled
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
  complain(
    `${path} is there already and is no agent's configuration. Move it away, or give another --config.`,
  )
  return { ok: false, exit: EXIT.config }
}

/** Of --listen, unless it listens on every address or on any port: that is no place to dial. */
function addressOf({ listen, tls }: Options): string | null {
  if (!listen || listen.port === 0 || listen.host === '0.0.0.0' || listen.host === '::') return null
  const scheme = tls?.cert ? 'wss' : 'ws'
  return `${scheme}://${listen.host.includes(':') ? `[${listen.host}]` : listen.host}:${listen.port}`
}
