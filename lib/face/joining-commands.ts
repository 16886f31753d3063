/**
 * The commands of the Joining page, in this one place. Capitals stand for what only the reader knows; they are
 * explained beside the commands.
 */
export interface JoiningInput {
  /** Scheme and host under which the agents reach this server. */
  origin: string
  /** The code, or null where it is not shown any more. */
  code: string | null
}

export interface Command {
  id: 'enrol' | 'run'
  label: string
  text: string
}

export const AGENT_PORT = 7600

export const PLACEHOLDERS = [
  { name: 'NAME', meaning: 'the node’s name, unique in the overlay: tar-01' },
  { name: 'HOST', meaning: 'the name or address under which neighbours reach this node' },
  {
    name: 'PEER',
    meaning:
      'the same of a neighbour, once for each; of two neighbours one naming the other is enough, and a first agent names none',
  },
] as const

export function joiningCommands({ origin, code }: JoiningInput): Command[] {
  const config = '--config NAME.json'
  const enrol = [
    'npx tsx agent/main.ts enrol',
    `--collector ${origin}`,
    `--code ${code ?? 'CODE'}`,
    '--name NAME',
    `--listen 0.0.0.0:${AGENT_PORT}`,
    `--address ws://HOST:${AGENT_PORT}`,
    config,
  ]
  const run = ['npx tsx agent/main.ts run', config, `--neighbour ws://PEER:${AGENT_PORT}`]
  return [
    { id: 'enrol', label: 'Enrol, once beside each node', text: enrol.join(' \\\n  ') },
    { id: 'run', label: 'Run, from then on', text: run.join(' \\\n  ') },
  ]
}

/** Whether agents on other machines can reach this address. */
export function onlyThisMachine(origin: string): boolean {
  const { hostname } = new URL(origin)
  return hostname === 'localhost' || hostname === '[::1]' || /^127\./.test(hostname)
}
