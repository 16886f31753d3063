/** What the commands of the Joining page are made of. */
export interface JoiningInput {
  /** Scheme and host under which the agents reach this server. */
  origin: string
  /** The code, or null where it is not shown any more. */
  code: string | null
  /** The agent as this server serves it; null while that is not known. */
  file: AgentFile | null
  /** Version of Node.js that this server runs on, without the v: one that is known to do. */
  nodeVersion: string
}

export interface AgentFile {
  version: string
  sha256: string
}

/** Text ready to be typed, or kept in a file. */
export interface Command {
  id: string
  label: string
  text: string
}

export const AGENT_PORT = 7600
export const FILE_NAME = 'thinspan-agent.mjs'

/** Capitals stand for what only the reader knows; they are explained beside the commands. */
export const PLACEHOLDERS = [
  { name: 'NAME', meaning: 'the node’s name, unique in the overlay: tar-01' },
  { name: 'HOST', meaning: 'the name or address under which neighbours reach this node' },
  {
    name: 'PEER',
    meaning:
      'the same of a neighbour; of two neighbours one naming the other is enough, and a first agent names none',
  },
] as const
export const CODE_PLACEHOLDER = { name: 'CODE', meaning: 'a joining code that is still open' } as const

export const codeOf = ({ code }: JoiningInput): string => code ?? CODE_PLACEHOLDER.name

/** One command over several lines. */
export const wrapped = (words: readonly string[]): string => words.join(' \\\n  ')
