import { z } from 'zod'
import { labelsSchema, linkAddressSchema, nodeAddressSchema, nodeNameSchema } from '@/lib/protocol'
import type { AgentConfig } from '../config'
import { readRule } from '../sources/rule'
import { readSource, type SourceConfig } from '../sources/source-config'
import type { ListenInit } from '../transport/transport'
import { COMMANDS, type Command, FlagError, type Given, readFlags } from './flags'
import { labelLines, readLabels, readListen, readMetrics, readSeconds } from './values'

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
  /** What follows is null where nothing was said: then the configuration counts. */
  node: string | null
  source: SourceConfig | null
  agentsAt: string | null
  listenMetrics: AgentConfig['listenMetrics']
  spool: string | null
  tls: AgentConfig['tls']
  upgrades: boolean | null
  enrolIfNeeded: boolean
  json: boolean
  yes: boolean
  reason: string
}

export type OptionsResult =
  | { ok: true; command: Command; options: Options }
  | { ok: true; command: 'help' }
  | { ok: true; command: 'version' }
  | { ok: false; issue: string }

export interface OptionsComponents {
  env: Record<string, string | undefined>
  hostname: () => string
  /** Whole text of a file. @throws Error where it cannot be read */
  readFile: (path: string) => string
}

/** Flags win over THINSPAN_… variables; lists in variables are separated by commas. */
export function readOptions(args: readonly string[], components: OptionsComponents): OptionsResult {
  try {
    return read(readFlags(args, components.env), components)
  } catch (error) {
    if (error instanceof FlagError) return { ok: false, issue: error.message }
    throw error
  }
}

function read(given: Given, components: OptionsComponents): OptionsResult {
  const [command, ...extra] = given.words
  if (given.mark('version') || command === 'version') return { ok: true, command: 'version' }
  if (given.mark('help') || command === undefined || command === 'help') return { ok: true, command: 'help' }
  if (!isCommand(command)) return { ok: false, issue: `There is no command "${command}".` }
  if (extra.length > 0) return { ok: false, issue: `"${extra[0]}" was not expected.` }
  const options = optionsOf(given, components, {
    // Secrets in files are read only by who needs them.
    forEnrolment: command === 'enrol' || (command === 'run' && given.mark('enrol-if-needed') === true),
  })
  const issue = check(options)
  return issue ? { ok: false, issue } : { ok: true, command, options }
}

function optionsOf(
  given: Given,
  components: OptionsComponents,
  { forEnrolment }: { forEnrolment: boolean },
): Options {
  const { one, many, mark } = given
  const file = (flag: 'code-file' | 'labels-file') => {
    const path = one(flag)
    return path === null || !forEnrolment ? null : textOf(components, `--${flag}`, path)
  }
  const listen = one('listen')
  return {
    collector: one('collector'),
    code: one('code') ?? file('code-file')?.trim() ?? null,
    name: one('name') ?? (forEnrolment ? components.hostname() : null),
    listen: listen === null ? null : readListen('--listen', listen),
    address: one('address'),
    labels: readLabels([...labelLines(file('labels-file') ?? ''), ...many('label')]),
    config: one('config') ?? DEFAULT_CONFIG,
    neighbours: many('neighbour'),
    node: one('node'),
    source: sourceOf(given),
    agentsAt: one('agents-at'),
    listenMetrics: metricsOf(given),
    spool: one('spool'),
    tls: tlsOf(given),
    upgrades: mark('upgrades'),
    enrolIfNeeded: mark('enrol-if-needed') ?? false,
    json: mark('json') ?? false,
    yes: mark('yes') ?? false,
    reason: one('reason') ?? '',
  }
}

function textOf({ readFile }: OptionsComponents, flag: string, path: string): string {
  try {
    return readFile(path)
  } catch (error) {
    throw new FlagError(`${flag}: ${error instanceof Error ? error.message : String(error)}`)
  }
}

function sourceOf({ one }: Given): SourceConfig | null {
  const text = one('neighbours-from')
  if (text === null) return null
  const every = one('neighbours-every')
  const everySeconds = every === null ? null : readSeconds('--neighbours-every', every)
  const source = readSource(text, { at: one('neighbours-at'), everySeconds })
  if (source.ok) return source.source
  throw new FlagError(`--neighbours-from: ${source.issue}`)
}

function metricsOf({ one, mark }: Given): Options['listenMetrics'] {
  const text = one('metrics')
  return text === null ? null : { ...readMetrics(text), anywhere: mark('metrics-anywhere') ?? false }
}

function tlsOf({ one }: Given): Options['tls'] {
  const [ca, cert, key] = [one('ca'), one('cert'), one('key')]
  if (ca === null && cert === null && key === null) return null
  if ((cert === null) !== (key === null)) throw new FlagError('--cert and --key go together.')
  return { ca, cert, key }
}

function isCommand(text: string): text is Command {
  return COMMANDS.some((command) => command === text)
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
  ['node', '--node', nodeAddressSchema],
]

function check(options: Options): string | null {
  for (const [key, flag, schema] of checks) {
    if (options[key] === null) continue
    const parsed = schema.safeParse(options[key])
    if (!parsed.success) return `${flag}: ${parsed.error.issues[0]?.message ?? 'not valid'}`
  }
  const rule = options.agentsAt === null ? null : readRule(options.agentsAt)
  return rule && !rule.ok ? `--agents-at: ${rule.issue}` : null
}
