import { parseArgs } from 'node:util'
import { z } from 'zod'
import { labelsSchema, linkAddressSchema, nodeNameSchema } from '@/lib/protocol'
import type { ListenInit } from '../transport/transport'

export const COMMANDS = ['enrol', 'run', 'status'] as const
export type Command = (typeof COMMANDS)[number]

export const DEFAULT_CONFIG = 'thinspan-agent.json'

export interface Options {
  collector: string | null
  code: string | null
  name: string | null
  listen: ListenInit | null
  address: string | null
  labels: Record<string, string>
  config: string
  neighbours: string[]
}

export type OptionsResult =
  | { ok: true; command: Command; options: Options }
  | { ok: true; command: 'help' }
  | { ok: false; issue: string }

const FLAGS = {
  collector: { type: 'string' },
  code: { type: 'string' },
  name: { type: 'string' },
  listen: { type: 'string' },
  address: { type: 'string' },
  label: { type: 'string', multiple: true },
  config: { type: 'string' },
  neighbour: { type: 'string', multiple: true },
  help: { type: 'boolean', short: 'h' },
} as const

/** Flags win over THINSPAN_… variables; lists in variables are separated by commas. */
export function readOptions(args: readonly string[], env: Record<string, string | undefined>): OptionsResult {
  let parsed: ReturnType<typeof parse>
  try {
    parsed = parse(args)
  } catch (error) {
    return { ok: false, issue: error instanceof Error ? error.message : String(error) }
  }
  const { values, positionals } = parsed
  const [command, ...extra] = positionals
  if (values.help || command === undefined) return { ok: true, command: 'help' }
  if (!isCommand(command)) return { ok: false, issue: `There is no command "${command}".` }
  if (extra.length > 0) return { ok: false, issue: `"${extra[0]}" was not expected.` }
  const one = (name: 'collector' | 'code' | 'name' | 'listen' | 'address' | 'config') =>
    values[name] ?? env[`THINSPAN_${name.toUpperCase()}`] ?? null
  const many = (given: string[] | undefined, variable: string) =>
    given ?? (env[variable] ?? '').split(',').filter((item) => item !== '')
  const labels = readLabels(many(values.label, 'THINSPAN_LABELS'))
  if (!labels.ok) return labels
  const listen = readListen(one('listen'))
  if (!listen.ok) return listen
  const options: Options = {
    collector: one('collector'),
    code: one('code'),
    name: one('name'),
    listen: listen.listen,
    address: one('address'),
    labels: labels.labels,
    config: one('config') ?? DEFAULT_CONFIG,
    neighbours: many(values.neighbour, 'THINSPAN_NEIGHBOURS'),
  }
  const issue = check(options)
  return issue ? { ok: false, issue } : { ok: true, command, options }
}

const parse = (args: readonly string[]) =>
  parseArgs({ args: [...args], options: FLAGS, allowPositionals: true, strict: true })

function isCommand(text: string): text is Command {
  return COMMANDS.some((command) => command === text)
}

function readLabels(
  pairs: readonly string[],
): { ok: true; labels: Record<string, string> } | { ok: false; issue: string } {
  const labels: Record<string, string> = {}
  for (const pair of pairs) {
    const at = pair.indexOf('=')
    if (at < 1) return { ok: false, issue: `A label is written key=value, not "${pair}".` }
    labels[pair.slice(0, at)] = pair.slice(at + 1)
  }
  return { ok: true, labels }
}

/** host:port, [v6]:port or :port for every address of the machine. */
export function readListen(
  text: string | null,
): { ok: true; listen: ListenInit | null } | { ok: false; issue: string } {
  if (text === null) return { ok: true, listen: null }
  const match = /^(?:\[([0-9a-f:.]+)\]|([^:[\]]*)):(\d{1,5})$/i.exec(text)
  const port = Number(match?.[3])
  if (!match || port > 65_535) return { ok: false, issue: `--listen takes host:port, not "${text}".` }
  return { ok: true, listen: { host: match[1] ?? (match[2] || '0.0.0.0'), port } }
}

const checks: [keyof Options, string, z.ZodType][] = [
  [
    'collector',
    '--collector',
    z.url({ protocol: /^https?$/, error: 'Give an http:// or https:// address.' }),
  ],
  ['name', '--name', nodeNameSchema],
  ['address', '--address', linkAddressSchema],
  ['labels', '--label', labelsSchema],
  ['neighbours', '--neighbour', z.array(linkAddressSchema)],
]

function check(options: Options): string | null {
  for (const [key, flag, schema] of checks) {
    if (options[key] === null) continue
    const parsed = schema.safeParse(options[key])
    if (!parsed.success) return `${flag}: ${parsed.error.issues[0]?.message ?? 'not valid'}`
  }
  return null
}
