import { type Clock, sleep } from '../clock'
import { describeCollectorError, isEnded } from '../collector/client'
import { changeConfig, putAside, readConfig } from '../config'
import { EXIT, type ExitCode } from '../exit-codes'
import { type CommandComponents, configOr, reasonOf } from './components'
import { LOOK_EVERY_MS } from './config-keeper'
import type { Options } from './options'
import { contactOf, exitOf } from './session'

/** An agent that runs has answered by then. */
const ANSWER_LOOKS = 4
/** Neighbours settle within seconds; then the collector is told. */
const LEAVE_LOOKS = 60

/**
 * Takes the node out of the overlay for good: it is not counted any more, and its neighbours shut their links. An agent
 * that runs does it itself, links first, so that no walkers are lost.
 */
export async function leaveCommand(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  const { say, complain, clock } = components
  const config = await configOr(components, options)
  if (!config) return EXIT.config
  const { name, overlay, agentId } = config
  if (!options.yes) {
    complain(
      `This takes ${name} out of ${overlay.name} for good: coming back takes a joining code. Say --yes if that is meant.`,
    )
    return EXIT.usage
  }
  const path = options.config
  const reason = await changeConfig(path, agentId, { leaving: options.reason }).catch(reasonOf)
  const runs = reason === null && (await isGone({ clock, path, looks: ANSWER_LOOKS, what: 'wish' }, signal))
  if (runs) {
    if (await isGone({ clock, path, looks: LEAVE_LOOKS, what: 'file' }, signal)) {
      say(`${name} has left ${overlay.name}, and the agent that ran has ended.`)
      return EXIT.ok
    }
    complain(`${name} has not left yet. Its log says why; the same command tries again.`)
    return EXIT.unreachable
  }
  const { reporter } = await contactOf(components, config)
  const left = await reporter.leave(options.reason, signal)
  // One that had left before has what it wanted.
  if (!left.ok && !isEnded(left.error)) {
    if (reason === null) await changeConfig(path, agentId, { leaving: undefined }).catch(reasonOf)
    complain(`${name} has not left: ${describeCollectorError(left.error)}`)
    return exitOf(left.error)
  }
  try {
    const aside = await putAside(path, 'left')
    say(`${name} has left ${overlay.name}. The configuration is ${aside} now.`)
    return EXIT.ok
  } catch (error) {
    complain(`${name} has left, but ${path} cannot be moved aside: ${reasonOf(error)}`)
    return EXIT.config
  }
}

async function isGone(
  { clock, path, looks, what }: { clock: Clock; path: string; looks: number; what: 'wish' | 'file' },
  signal: AbortSignal,
): Promise<boolean> {
  for (let look = 0; look < looks; look++) {
    if (!(await sleep(clock, LOOK_EVERY_MS, signal))) return false
    const present = await readConfig(path)
    if (what === 'wish' && present.ok && present.config.leaving === undefined) return true
    if (!present.ok && present.error.code === 'missing') return true
  }
  return false
}
