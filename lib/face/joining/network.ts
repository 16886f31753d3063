import { AGENT_PORT } from './types'

export interface NetworkNote {
  /** Who speaks to whom, or what stands between. */
  what: string
  text: string
}

export function networkNotes(origin: string): NetworkNote[] {
  return [
    {
      what: 'agent to this server',
      text: `TCP ${portOf(origin)}, outward only. The server never dials an agent.`,
    },
    {
      what: 'agent to agent',
      text: `TCP ${AGENT_PORT}, or what --listen says. One direction for each link is enough: whichever end can, dials.`,
    },
    {
      what: 'a node that can only dial out',
      text: 'Leave --listen and --address out; its neighbours need not name it. Two such nodes cannot be linked to each other.',
    },
    {
      what: 'wss',
      text: 'With --cert and --key the agent listens with TLS, and its --address begins with wss://. --ca names the certificates of a private authority, for neighbours and this server alike. Agents prove themselves to each other with their own keys either way: TLS hides who speaks with whom and how much.',
    },
    {
      what: 'a proxy in front of this server or an agent',
      text: 'It must pass WebSocket upgrades on and bodies of 1 MiB, and must not hold messages back, answer from a cache, repeat requests, rewrite bodies or cut connections that are in use. Delay it adds is counted as the link’s.',
    },
    {
      what: 'what agents offer besides',
      text: 'Nothing, unless --metrics says a port: then /metrics, /health and /status on loopback, without a password.',
    },
  ]
}

/** Whether agents on other machines can reach this address. */
export function onlyThisMachine(origin: string): boolean {
  const { hostname } = new URL(origin)
  return hostname === 'localhost' || hostname === '[::1]' || /^127\./.test(hostname)
}

function portOf(origin: string): string {
  const { port, protocol } = new URL(origin)
  return port || (protocol === 'https:' ? '443' : '80')
}
