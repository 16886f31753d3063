import { PACES } from '@/lib/method/pace'
import { keysFromPem, pemOf } from '@/lib/protocol'
import { type Agent, createAgent } from '../agent'
import { createSpoolFile } from '../away/spool-store'
import { describeCollectorError } from '../collector/client'
import { createHttpCollector } from '../collector/http-client'
import type { Post } from '../collector/post'
import { type AgentConfig, readConfig, ringOf } from '../config'
import { EXIT, type ExitCode } from '../exit-codes'
import { createWsTransport } from '../transport/ws'
import { Upgrader } from '../upgrade'
import { Companions } from './companions'
import { aborted, type CommandComponents, configOr, reasonOf } from './components'
import { ConfigKeeper } from './config-keeper'
import { enrolCommand } from './enrol-command'
import type { Options } from './options'
import { exitOf, tlsOf } from './session'
import { type Settings, settingsOf } from './settings'

/** Measures and reports until it is stopped, ended by the overlay, or replaced by a later version. */
export async function runCommand(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  if (options.enrolIfNeeded) {
    const enrolled = await enrolIfNeeded(components, options, signal)
    if (enrolled !== EXIT.ok) return enrolled
  }
  const config = await configOr(components, options)
  if (!config) return EXIT.config
  const settings = settingsOf(config, options)
  let post: Post
  let transport: ReturnType<typeof createWsTransport>
  try {
    const tls = await tlsOf(settings)
    post = components.createPost({ ca: tls?.ca })
    transport = createWsTransport({ clock: components.clock }, { tls })
  } catch (error) {
    components.complain(reasonOf(error))
    return EXIT.config
  }
  const finish = deferred()
  const run = { components, options, config, settings, post, finish: finish.resolve, signal }
  const { agent, keeper, upgrader } = await compose(run, transport)
  const companions = new Companions(components, { settings, post, agent, pace: PACES[config.pace] })
  try {
    await agent.start()
    await companions.start()
  } catch (error) {
    components.complain(`Cannot listen: ${reasonOf(error)}`)
    finish.resolve(EXIT.listen)
  }
  keeper.start()
  void aborted(signal).then(() => finish.resolve(EXIT.ok))
  const exit = await finish.promise
  await companions.stop()
  await upgrader.stop()
  await agent.stop()
  await keeper.stop()
  return exit
}

/** A unit file may say `run` for machines that have never been enrolled. */
async function enrolIfNeeded(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  const present = await readConfig(options.config)
  const isNeeded = !present.ok && (present.error.code === 'missing' || present.error.code === 'unfinished')
  return isNeeded ? enrolCommand(components, options, signal) : EXIT.ok
}

interface Run {
  components: CommandComponents
  options: Options
  config: AgentConfig
  settings: Settings
  post: Post
  finish: (exit: ExitCode) => void
  signal: AbortSignal
}

async function compose(
  { components, options, config, settings, post, finish, signal }: Run,
  transport: ReturnType<typeof createWsTransport>,
): Promise<{ agent: Agent; keeper: ConfigKeeper; upgrader: Upgrader }> {
  const { clock, random, randomBytes, logger, version } = components
  const { agentId, overlay, overlayKey, pass, weights, pendingKey } = config
  const keeper = new ConfigKeeper(
    { clock, logger },
    {
      path: options.config,
      agentId,
      known: [config.privateKey, ...(pendingKey ? [pendingKey] : [])],
      onForeignKey: (pem) => void agent.takeKey(keysFromPem(pem), signal),
      onLeaving: async (reason) => {
        const left = await agent.leave(signal, reason)
        if (!left.ok) {
          components.complain(`${config.name} has not left: ${describeCollectorError(left.error)}`)
          return finish(exitOf(left.error))
        }
        await keeper.retire('left').catch((error: unknown) => components.complain(reasonOf(error)))
        finish(EXIT.ended)
      },
    },
  )
  const upgrader = new Upgrader(
    { post, clock, runProgram: components.runProgram, logger },
    {
      collector: config.collector,
      ownFile: components.ownFile,
      nodeProgram: components.nodeProgram,
      version,
      isOn: settings.upgrades,
      onState: (offered, state, error) => agent.noteUpgrade({ version: offered, state, error }),
      onReplaced: () => finish(EXIT.upgraded),
    },
  )
  const agent = createAgent(
    {
      transport,
      collector: createHttpCollector({ post, clock }, { baseUrl: config.collector }),
      clock,
      random,
      logger,
      keys: keysFromPem(config.privateKey),
      randomBytes,
      spool: settings.spool === null ? undefined : createSpoolFile(settings.spool),
    },
    {
      identity: {
        agentId,
        overlayId: overlay.id,
        overlayKey,
        pass,
        weights,
        keyRing: ringOf(config),
        pendingKeys: pendingKey ? keysFromPem(pendingKey) : undefined,
      },
      version,
      pace: config.pace,
      listen: settings.listen,
      address: settings.address,
      node: settings.node,
      host: (await components.hostFingerprint()) ?? undefined,
      neighbours: settings.neighbours.map((address) => ({ address })),
      // So that links open after a restart while the collector is away.
      onPass: (grant) => void keeper.keep('the renewed pass', grant),
      onRing: ({ version: ring, keys }) =>
        void keeper.keep('the key ring', { keyRing: { version: ring, keys: [...keys] } }),
      onKey: async ({ state, keys }) => {
        const pem = pemOf(keys.privateKey)
        const change = state === 'pending' ? { pendingKey: pem } : { privateKey: pem, pendingKey: undefined }
        const reason = await keeper.keep('a key', change)
        if (reason !== null) throw new Error(reason)
      },
      onUpgradeOffer: (offer) => upgrader.consider(offer),
      onEnded: ({ detail }) => {
        components.complain(`${config.name} is none of ${overlay.name} any more: ${detail}`)
        finish(EXIT.ended)
      },
    },
  )
  return { agent, keeper, upgrader }
}

function deferred(): { promise: Promise<ExitCode>; resolve: (exit: ExitCode) => void } {
  let resolve: (exit: ExitCode) => void = () => {}
  const promise = new Promise<ExitCode>((settle) => {
    resolve = settle
  })
  return { promise, resolve }
}
