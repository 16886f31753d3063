import type { Directory } from '@/lib/protocol'
import type { Post } from '../collector/post'
import type { AgentConfig } from '../config'
import { readerOf, readRule, resolveItems } from '../sources'
import type { Transport } from '../transport/transport'
import { isLoopback } from '../watch'
import { type CommandComponents, reasonOf } from './components'
import { bad, type Finding, good } from './finding'
import type { Settings } from './settings'

const DIAL_TIMEOUT_MS = 5_000
/** A long list is tried in part: the first ones show what is wrong as well as all. */
const MOST_DIALED = 50

export async function listenFindings(
  { clock }: CommandComponents,
  { settings, transport }: { settings: Settings; transport: Transport },
  signal: AbortSignal,
): Promise<Finding[]> {
  const { listen, address, listenMetrics } = settings
  const findings: Finding[] = []
  let isFree = false
  if (listen) {
    const what = 'Listening'
    const place = `${listen.host}:${listen.port}`
    try {
      const listening = await transport.listen(listen, (connection) => connection.close(1001, 'a check'))
      isFree = true
      // Dialed while it listens, so that a firewall or a wrong address shows.
      if (address !== null) findings.push(await ownAddressFinding(transport, { clock, address }, signal))
      await listening.close()
      findings.unshift(good(what, `${place} is free`))
    } catch (error) {
      const remedy = isInUse(error)
        ? 'Stop what has it: if that is this agent, check before it is started.'
        : 'Give an address of this machine: --listen.'
      findings.push(bad(what, `${place} cannot be taken: ${reasonOf(error)}.`, remedy))
    }
  }
  if (listen && isFree && address === null)
    findings.push(
      bad(
        'Own address',
        'it listens, but nobody is told where.',
        'Give --address ws://HOST:PORT as neighbours reach it.',
      ),
    )
  if (listenMetrics && !listenMetrics.anywhere && !isLoopback(listenMetrics.host))
    findings.push(
      bad(
        'Metrics',
        `${listenMetrics.host} is reached from other machines.`,
        'Give 127.0.0.1, or say --metrics-anywhere.',
      ),
    )
  return findings
}

const isInUse = (error: unknown): boolean =>
  error instanceof Error && 'code' in error && error.code === 'EADDRINUSE'

async function ownAddressFinding(
  transport: Transport,
  { clock, address }: Pick<CommandComponents, 'clock'> & { address: string },
  signal: AbortSignal,
): Promise<Finding> {
  const reason = await dialOnce(transport, { clock, address }, signal)
  if (reason === null) return good('Own address', `${address} can be dialed from here`)
  return bad(
    'Own address',
    `${address} cannot be dialed from here: ${reason}.`,
    'Correct --address, or let the port through the firewall.',
  )
}

/** @returns why not, or null */
async function dialOnce(
  transport: Transport,
  { clock, address }: Pick<CommandComponents, 'clock'> & { address: string },
  signal: AbortSignal,
): Promise<string | null> {
  const abort = new AbortController()
  const onAbort = () => abort.abort()
  const cancel = clock.after(DIAL_TIMEOUT_MS, onAbort)
  signal.addEventListener('abort', onAbort, { once: true })
  const result = await transport.dial(address, abort.signal)
  cancel()
  signal.removeEventListener('abort', onAbort)
  if (!result.ok) return abort.signal.aborted ? `no answer within ${DIAL_TIMEOUT_MS / 1000} s` : result.reason
  result.connection.close(1001, 'a check')
  return null
}

export async function sourceFinding(
  components: CommandComponents,
  init: { settings: Settings; config: AgentConfig; post: Post; directory: () => Promise<Directory | null> },
  signal: AbortSignal,
): Promise<{ finding: Finding | null; addresses: string[] }> {
  const { settings, config, post } = init
  const rule = readRule(settings.agentsAt)
  if (settings.source === null || !rule.ok) return { finding: null, addresses: [] }
  const { clock, runProgram, resolveSrv } = components
  const read = readerOf({ clock, post, runProgram, resolveSrv }, settings.source)
  const look = await read(signal)
  const what = `Neighbours by ${settings.source.kind}`
  const none = (finding: Finding) => ({ finding, addresses: [] })
  if (!look.ok)
    return none(
      bad(
        what,
        `the list cannot be read: ${look.reason}.`,
        'Mend that, or correct --neighbours-from and --neighbours-at.',
      ),
    )
  if (look.items.length === 0)
    return none(
      bad(
        what,
        'the list is empty.',
        'See whether the node has joined, and whether --neighbours-at leads to its list.',
      ),
    )
  const directory = rule.rule.kind === 'directory' ? await init.directory() : null
  const self = { agentId: config.agentId, address: settings.address, node: settings.node }
  const { neighbours, without } = resolveItems(look.items, { rule: rule.rule, directory, self })
  const says = `${look.items.length} listed, ${neighbours.length} with an agent to link to`
  const addresses = neighbours.flatMap(({ address }) => (address === null ? [] : [address]))
  if (without.length === 0 || neighbours.length > 0) return { finding: good(what, says), addresses }
  const remedy =
    rule.rule.kind === 'directory'
      ? 'Give every agent --node as the overlay knows its node.'
      : 'Say how an agent’s address follows from a node’s: --agents-at PORT, for one.'
  return { finding: bad(what, `${says}; the first is "${without[0]}".`, remedy), addresses }
}

export async function neighbourFindings(
  { clock }: CommandComponents,
  { addresses, transport }: { addresses: readonly string[]; transport: Transport },
  signal: AbortSignal,
): Promise<Finding[]> {
  if (addresses.length === 0) return []
  const tried = addresses.slice(0, MOST_DIALED)
  const reasons = await Promise.all(tried.map((address) => dialOnce(transport, { clock, address }, signal)))
  const findings = tried.flatMap((address, index) => {
    const reason = reasons[index]
    if (!reason) return []
    return [
      bad(
        'Neighbour',
        `${address} cannot be dialed: ${reason}.`,
        'See whether its agent runs and the network lets this one through.',
      ),
    ]
  })
  const reached = tried.length - findings.length
  return [...(reached > 0 ? [good('Neighbours', `${reached} of ${tried.length} answer`)] : []), ...findings]
}
