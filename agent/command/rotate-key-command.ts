import { generateKeys, keysFromPem, pemOf } from '@/lib/protocol'
import { type Clock, sleep } from '../clock'
import { describeCollectorError } from '../collector/client'
import { type AgentConfig, changeConfig, readConfig } from '../config'
import { EXIT, type ExitCode } from '../exit-codes'
import { OwnKeys, type RotationError } from '../trust/own-keys'
import { type CommandComponents, configOr, reasonOf } from './components'
import { LOOK_EVERY_MS } from './config-keeper'
import type { Options } from './options'
import { contactOf, exitOf } from './session'

/** An agent that runs has seen the new key by then, and put it in force itself, without a gap in its reports. */
const RUNNING_LOOKS = 4

/** Puts a new key in the place of the agent's. */
export async function rotateKeyCommand(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  const { clock, say, complain } = components
  const config = await configOr(components, options)
  if (!config) return EXIT.config
  const { agentId, name } = config
  const pendingKey = config.pendingKey ?? pemOf(generateKeys().privateKey)
  const reason = await changeConfig(options.config, agentId, { pendingKey }).catch(reasonOf)
  if (reason !== null) {
    complain(`The key was not changed: ${options.config} cannot be written: ${reason}`)
    return EXIT.config
  }
  if (await isDoneByAgent({ clock, path: options.config, key: pendingKey }, signal)) {
    say(`${name} has a new key; the agent that runs uses it.`)
    return EXIT.ok
  }
  const error = await rotate(components, { path: options.config, config, pendingKey }, signal)
  if (error) return refused(components, options, error)
  say(`${name} has a new key.`)
  return EXIT.ok
}

async function isDoneByAgent(
  { clock, path, key }: { clock: Clock; path: string; key: string },
  signal: AbortSignal,
): Promise<boolean> {
  for (let look = 0; look < RUNNING_LOOKS; look++) {
    if (!(await sleep(clock, LOOK_EVERY_MS, signal))) return false
    const present = await readConfig(path)
    if (present.ok && present.config.privateKey === key) return true
  }
  return false
}

async function rotate(
  components: CommandComponents,
  { path, config, pendingKey }: { path: string; config: AgentConfig; pendingKey: string },
  signal: AbortSignal,
): Promise<RotationError | null> {
  const { clock, randomBytes } = components
  const { agentId } = config
  const { collector, reporter } = await contactOf(components, config)
  // For the collector's time: this machine's clock may be off. Where the old key is out already, the new one answers.
  await reporter.check(signal)
  const keep = async (change: Partial<AgentConfig>) => {
    const reason = await changeConfig(path, agentId, change)
    if (reason !== null) throw new Error(reason)
  }
  const keys = new OwnKeys(
    { collector, clock, randomBytes, nowMs: () => reporter.nowMs() },
    {
      agentId,
      keys: keysFromPem(config.privateKey),
      pending: keysFromPem(pendingKey),
      onKey: ({ state, keys }) =>
        state === 'pending' ? undefined : keep({ privateKey: pemOf(keys.privateKey), pendingKey: undefined }),
    },
  )
  const result = await keys.rotate(signal)
  if (!result.ok) {
    if (result.error.code === 'not-taken') await keep({ pendingKey: undefined })
    return result.error
  }
  await keep(result.grant)
  return null
}

function refused({ complain }: CommandComponents, { config }: Options, error: RotationError): ExitCode {
  if (error.code === 'not-kept') {
    complain(`The key was not changed: ${config} cannot be written: ${error.reason}`)
    return EXIT.config
  }
  const sentence = describeCollectorError(error.error)
  if (error.code === 'not-taken') complain(`The key was not changed: ${sentence}`)
  else
    complain(
      `Whether the key was changed is not known: ${sentence}\n${config} keeps both keys: the same command finishes it.`,
    )
  return exitOf(error.error)
}
