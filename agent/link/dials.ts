import { CLOSE, type CloseName } from '@/lib/protocol'
import type { Backoff } from '../backoff'
import type { Logger } from '../logger'
import type { Connection } from '../transport/transport'
import { Dialer, type DialerComponents } from './dialer'
import type { Neighbour } from './neighbours'
import type { LinkSession } from './session'

export interface DialsComponents extends DialerComponents {
  logger: Logger
}

export interface DialsInit {
  backoff: Backoff
  isWanted: (neighbour: Neighbour) => boolean
  /** Makes a session of a connection that was dialed, not yet started. */
  open: (connection: Connection, neighbour: Neighbour) => LinkSession
}

/** One dialer per neighbour with an address, and which connections they opened. */
export class Dials {
  private readonly components: DialsComponents
  private readonly init: DialsInit
  private readonly dialers = new Map<Neighbour, Dialer>()
  private readonly dialed = new Map<LinkSession, { dialer: Dialer; neighbour: Neighbour }>()

  constructor(components: DialsComponents, init: DialsInit) {
    this.components = components
    this.init = init
  }

  get sessions(): Iterable<LinkSession> {
    return this.dialed.keys()
  }

  /** Dials a neighbour's address for as long as it has it. */
  keep(neighbour: Neighbour): void {
    const { address } = neighbour
    const present = this.dialers.get(neighbour)
    if (address === null || present?.address === address) return
    present?.stop()
    const { logger } = this.components
    const dialer = new Dialer(this.components, {
      address,
      backoff: this.init.backoff,
      isWanted: () => this.init.isWanted(neighbour),
      opened: (connection) => {
        const session = this.init.open(connection, neighbour)
        this.dialed.set(session, { dialer, neighbour })
        session.start()
      },
      failed: (reason, waitMs) => logger.debug({ address, reason, waitMs }, 'dialing again'),
    })
    this.dialers.set(neighbour, dialer)
    if (this.init.isWanted(neighbour)) dialer.want()
  }

  drop(neighbour: Neighbour): void {
    this.dialers.get(neighbour)?.stop()
    this.dialers.delete(neighbour)
  }

  /** Whose address the connection was dialed at, where that is still a neighbour's. */
  neighbourOf(session: LinkSession): Neighbour | null {
    const neighbour = this.dialed.get(session)?.neighbour
    return neighbour && this.dialers.has(neighbour) ? neighbour : null
  }

  closed(session: LinkSession, reason: string, name: CloseName | null): void {
    const dialing = this.dialed.get(session)
    this.dialed.delete(session)
    if (!dialing) return
    const { dialer, neighbour } = dialing
    const again = this.dialers.get(neighbour) === dialer && this.init.isWanted(neighbour)
    dialer.ended(reason, { again, hopeless: isHopeless(name, session.peer !== null) })
  }

  /** The last connection with a peer is gone, whoever opened it. */
  wantSoon(peer: string, reason: string): void {
    for (const [neighbour, dialer] of this.dialers) {
      if (neighbour.agentId === peer && this.init.isWanted(neighbour)) dialer.wantSoon(reason)
    }
  }

  /** What stood in the way of a link with a peer has gone: no more waiting. */
  wantNow(peer: string | null): void {
    for (const [neighbour, dialer] of this.dialers) {
      const isMeant = peer === null || neighbour.agentId === peer
      if (isMeant && this.init.isWanted(neighbour)) dialer.wantNow()
    }
  }

  stop(): void {
    for (const dialer of this.dialers.values()) dialer.stop()
  }
}

/** Dialing again at once cannot help: something has to change at the other end first. */
function isHopeless(name: CloseName | null, wasProven: boolean): boolean {
  if (name === null) return false
  // The other end has put another key in force: the link is made anew with that.
  if (name === 'pass-of-another-agent' && wasProven) return false
  return name === 'not-a-neighbour' || name === 'link-removed' || !CLOSE[name].retry
}
