import { linkAddressSchema } from '@/lib/protocol'

/** How the address of a neighbour's agent follows from how the overlay knows the neighbour. */
export type AddressRule =
  /** The overlay's list is one of agents' addresses already. */
  | { kind: 'as-given' }
  /** `ws://{host}:7946/`, with the host and port of the node put in. */
  | { kind: 'template'; template: string }
  /** Looked up in the overlay's directory of agents. */
  | { kind: 'directory' }

export type RuleResult = { ok: true; rule: AddressRule } | { ok: false; issue: string }

/** `as-given`, `directory`, a port (same host), or a template. */
export function readRule(text: string): RuleResult {
  if (text === 'as-given' || text === 'directory') return { ok: true, rule: { kind: text } }
  const template = /^\d{1,5}$/.test(text) ? `ws://{host}:${text}/` : text
  const example = fill(template, { host: 'node.example', port: 1 })
  if (example === null || !linkAddressSchema.safeParse(example).success || !template.includes('{host}'))
    return {
      ok: false,
      issue: `"${text}" is no rule: give as-given, directory, a port, or ws://{host}:PORT/ with {host} and perhaps {port}.`,
    }
  return { ok: true, rule: { kind: 'template', template } }
}

export interface HostPort {
  host: string
  port: number | null
}

/** Host and port of a node as an overlay writes it: bare, with a port, in brackets, or inside an address. */
export function hostPortOf(node: string): HostPort | null {
  const inside = /^[a-z][a-z0-9+.-]*:\/\/([^/?#]+)/i.exec(node)?.[1] ?? node
  const text = inside.replace(/^[^@]*@/, '')
  const bracketed = /^\[([0-9a-f:.%]+)\](?::(\d{1,5}))?$/i.exec(text)
  if (bracketed?.[1]) return hostPort(bracketed[1], bracketed[2])
  // More than one colon and no brackets: an IPv6 address by itself.
  if (/^[0-9a-f:.]*:[0-9a-f:.]*:[0-9a-f:.]*$/i.test(text)) return hostPort(text, undefined)
  const plain = /^([^\s:/[\]]+)(?::(\d{1,5}))?$/.exec(text)
  return plain?.[1] ? hostPort(plain[1], plain[2]) : null
}

function hostPort(host: string, portText: string | undefined): HostPort | null {
  const port = portText === undefined ? null : Number(portText)
  return port !== null && (port < 1 || port > 65_535) ? null : { host, port }
}

/** Null where the template asks for a port that the node does not say. */
export function fill(template: string, { host, port }: HostPort): string | null {
  if (template.includes('{port}') && port === null) return null
  return template
    .replaceAll('{host}', host.includes(':') ? `[${host}]` : host)
    .replaceAll('{port}', String(port))
}
