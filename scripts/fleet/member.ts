import {
  type Agent,
  type Clock,
  type CollectorClient,
  createAgent,
  describeCollectorError,
  type Ending,
  enrol,
  type HeldRing,
  type LinkEvent,
  type Logger,
  type SpoolStore,
  type Transport,
} from '@/agent'
import type { PaceName } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import type { EnrolReply, KeyPair, UpgradeOffer } from '@/lib/protocol'
import { type Silence, SilenceableCollector, silenceable } from './silenceable'

/** Neighbours on one machine are back soon: waiting long for them would only slow the story down. */
const BACKOFF = { baseMs: 50, capMs: 1_000 }
export const FLEET_VERSION = '0.1.0-fleet'

export interface MemberComponents {
  transport: Transport
  collector: CollectorClient
  clock: Clock
  random: Random
  randomBytes: (count: number) => Uint8Array
  logger: Logger
}

export interface MemberInit {
  name: string
  labels: Record<string, string>
  code: string
  keys: KeyPair
  host: string
  weights: 'unit' | 'delivered' | null
  pace: PaceName | null
  spool?: SpoolStore
  onLinkEvent: (event: LinkEvent) => void
  onUpgradeOffer?: (offer: UpgradeOffer) => void
  onEnded?: (ending: Ending) => void
}

/** One node of the fleet: a key that stays, and an agent that comes and goes. */
export class Member {
  readonly name: string
  readonly silence: Silence = { direct: false, relayed: false }
  readonly collector: CollectorClient
  agent: Agent | null = null
  private readonly components: MemberComponents
  private readonly init: MemberInit
  private readonly transport: Transport
  private keys: KeyPair
  private keyRing: HeldRing | undefined
  private enrolled: EnrolReply | null = null
  private pass = ''
  private port = 0

  constructor(components: MemberComponents, init: MemberInit) {
    this.components = components
    this.init = init
    this.name = init.name
    this.keys = init.keys
    this.transport = silenceable(components.transport, this.silence)
    this.collector = new SilenceableCollector({ inner: components.collector }, this.silence)
  }

  get agentId(): string {
    if (!this.enrolled) throw new Error(`${this.name} is not enrolled`)
    return this.enrolled.agentId
  }

  get weights(): 'unit' | 'delivered' {
    return this.init.weights ?? this.enrolled?.weights ?? 'delivered'
  }

  /** @throws Error where the collector does not take it */
  async enrol(signal: AbortSignal): Promise<void> {
    const { code, name, labels } = this.init
    const result = await enrol(
      { collector: this.collector, keys: this.keys },
      // The port is any that is free and will be another tomorrow: nothing for the overlay's directory.
      { code, name, labels, address: null, version: FLEET_VERSION },
      signal,
    )
    if (!result.ok) throw new Error(`${name} is not enrolled: ${describeCollectorError(result.error)}`)
    this.enrolled = result.value
    this.pass = result.value.pass
  }

  /** Starts a new incarnation, on the port of the last one. @returns the address to dial */
  async start(): Promise<string> {
    const { enrolled } = this
    if (!enrolled || this.agent) throw new Error(`${this.name} is not enrolled or runs already`)
    const { clock, random, randomBytes, logger } = this.components
    const agent = createAgent(
      {
        transport: this.transport,
        collector: this.collector,
        clock,
        random,
        randomBytes,
        logger,
        keys: this.keys,
        spool: this.init.spool,
      },
      {
        identity: {
          agentId: enrolled.agentId,
          overlayId: enrolled.overlay.id,
          overlayKey: enrolled.overlayKey,
          pass: this.pass,
          weights: this.weights,
          keyRing: this.keyRing,
        },
        version: FLEET_VERSION,
        pace: this.init.pace ?? enrolled.pace,
        listen: { host: this.init.host, port: this.port },
        backoff: BACKOFF,
        onPass: (grant) => {
          this.pass = grant.pass
        },
        onRing: (ring) => {
          this.keyRing = ring
        },
        onKey: ({ state, keys }) => {
          if (state === 'in-force') this.keys = keys
        },
        onUpgradeOffer: this.init.onUpgradeOffer,
        onEnded: this.init.onEnded,
        onLinkEvent: this.init.onLinkEvent,
      },
    )
    this.agent = agent
    await agent.start()
    const address = agent.address
    if (address === null) throw new Error(`${this.name} does not listen`)
    this.port = Number(address.slice(address.lastIndexOf(':') + 1))
    return address
  }

  async stop(): Promise<void> {
    const { agent } = this
    this.agent = null
    await agent?.stop()
  }
}
