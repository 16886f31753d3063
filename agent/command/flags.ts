import { parseArgs } from 'node:util'

export const COMMANDS = ['enrol', 'run', 'check', 'status', 'leave', 'rotate-key'] as const
export type Command = (typeof COMMANDS)[number]

const text = { type: 'string' } as const
const texts = { type: 'string', multiple: true } as const
const mark = { type: 'boolean' } as const

const FLAGS = {
  collector: text,
  code: text,
  'code-file': text,
  name: text,
  label: texts,
  'labels-file': text,
  listen: text,
  address: text,
  node: text,
  neighbour: texts,
  'neighbours-from': text,
  'neighbours-at': text,
  'neighbours-every': text,
  'agents-at': text,
  metrics: text,
  'metrics-anywhere': mark,
  spool: text,
  ca: text,
  cert: text,
  key: text,
  upgrades: mark,
  'enrol-if-needed': mark,
  config: text,
  json: mark,
  yes: mark,
  reason: text,
  help: { type: 'boolean', short: 'h' },
  version: mark,
} as const

export const FLAG_NAMES = Object.keys(FLAGS).map((name) => `--${name}`)

type Named<T> = { [K in keyof typeof FLAGS]: (typeof FLAGS)[K] extends T ? K : never }[keyof typeof FLAGS]
type OneFlag = Exclude<Named<{ type: 'string' }>, 'label' | 'neighbour'>
type MarkFlag = Named<{ type: 'boolean' }>

/** A command line beside the variables that stand in for it. Flags win. */
export interface Given {
  words: string[]
  one(flag: OneFlag): string | null
  many(flag: 'label' | 'neighbour'): string[]
  /** Null where neither says. @throws FlagError where a variable is neither yes nor no */
  mark(flag: MarkFlag): boolean | null
}

export class FlagError extends Error {}

/** @throws FlagError for a flag that does not exist or lacks its value */
export function readFlags(args: readonly string[], env: Record<string, string | undefined>): Given {
  const { values, positionals } = parse(args)
  const variable = (flag: string) => env[`THINSPAN_${flag.toUpperCase().replaceAll('-', '_')}`]
  return {
    words: positionals,
    // A variable that is set to nothing, as unit files and containers do, says nothing.
    one: (flag) => values[flag] ?? (variable(flag) || null),
    many: (flag) =>
      values[flag] ?? (variable(`${flag}s`) ?? '').split(',').filter((item) => item.trim() !== ''),
    mark(flag) {
      const said = values[flag]
      if (said !== undefined) return said
      const word = (variable(flag) ?? '').toLowerCase()
      if (word === '') return null
      if (['yes', 'true', '1'].includes(word)) return true
      if (['no', 'false', '0'].includes(word)) return false
      throw new FlagError(`THINSPAN_${flag.toUpperCase().replaceAll('-', '_')} is yes or no, not "${word}".`)
    },
  }
}

function parse(args: readonly string[]) {
  try {
    return parseArgs({ args: [...args], options: FLAGS, allowPositionals: true, strict: true })
  } catch (error) {
    throw new FlagError(error instanceof Error ? error.message : String(error))
  }
}
