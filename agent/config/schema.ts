import { z } from 'zod'
import { PACE_NAMES } from '@/lib/method/pace'
import {
  keysFromPem,
  labelsSchema,
  linkAddressSchema,
  nodeAddressSchema,
  passGrantSchema,
  RAW_KEY,
} from '@/lib/protocol'
import { readRule } from '../sources/rule'
import { sourceConfigSchema } from '../sources/source-config'

/** PKCS #8 PEM, Ed25519. */
export const privateKeySchema = z.string().refine(isKey, 'Not an Ed25519 key as PKCS #8 PEM.')
const listenSchema = z.object({ host: z.string().min(1), port: z.number().int().min(0).max(65_535) })
const path = z.string().min(1).nullable().default(null)

function isKey(pem: string): boolean {
  try {
    keysFromPem(pem)
    return true
  } catch {
    return false
  }
}

/** What `enrol` writes and `run` reads. Holds the private key: readable by its owner alone. */
export const configSchema = passGrantSchema.extend({
  collector: z.url({ protocol: /^https?$/ }),
  agentId: z.string().min(1),
  name: z.string().min(1),
  overlay: z.object({ id: z.string().min(1), slug: z.string(), name: z.string() }),
  overlayKey: z.string().regex(RAW_KEY),
  weights: z.enum(['unit', 'delivered']),
  pace: z.enum(PACE_NAMES),
  labels: labelsSchema,
  listen: listenSchema.nullable(),
  address: linkAddressSchema.nullable(),
  /** Addresses that are dialed from the start. */
  neighbours: z.array(linkAddressSchema),
  privateKey: privateKeySchema,
  /** How the overlay knows the node. */
  node: nodeAddressSchema.nullable().default(null),
  /** Where the overlay's own neighbours are learnt from. */
  source: sourceConfigSchema.nullable().default(null),
  /** How an agent's address follows from a neighbour's. */
  agentsAt: z
    .string()
    .superRefine((text, context) => {
      const read = readRule(text)
      if (!read.ok) context.addIssue({ code: 'custom', message: read.issue })
    })
    .default('as-given'),
  /** Metrics, health and status for programs of this machine. */
  listenMetrics: listenSchema
    .extend({ anywhere: z.boolean().default(false) })
    .nullable()
    .default(null),
  /** A folder for reports that could not be delivered. */
  spool: path,
  /** Paths of PEM files. */
  tls: z.object({ ca: path, cert: path, key: path }).nullable().default(null),
  upgrades: z.boolean().default(false),
  /** The overlay's keys held; before the first rotation it is `overlayKey` alone. */
  keyRing: z
    .object({ version: z.number().int().min(1), keys: z.array(z.string().regex(RAW_KEY)).min(1).max(4) })
    .optional(),
  /** A new key, from before it is offered until the collector has taken it. */
  pendingKey: privateKeySchema.nullable().optional(),
  /** Asks the agent that runs to leave the overlay, and says why. */
  leaving: z.string().optional(),
})
export type AgentConfig = z.infer<typeof configSchema>
export type HeldRing = NonNullable<AgentConfig['keyRing']>

export const ringOf = ({ keyRing, overlayKey }: AgentConfig): HeldRing =>
  keyRing ?? { version: 1, keys: [overlayKey] }

/** What stands in the configuration's place from before the joining code is used until the collector has answered. */
export const draftSchema = z.strictObject({ privateKey: privateKeySchema })
export type ConfigDraft = z.infer<typeof draftSchema>

export type ConfigError =
  | { code: 'missing' }
  | { code: 'unreadable'; reason: string }
  | { code: 'invalid'; issue: string }
  | { code: 'unfinished'; draft: ConfigDraft }

export type ConfigResult = { ok: true; config: AgentConfig } | { ok: false; error: ConfigError }

export function parseConfig(text: string): ConfigResult {
  let content: unknown
  try {
    content = JSON.parse(text)
  } catch {
    return { ok: false, error: { code: 'invalid', issue: 'not JSON' } }
  }
  const parsed = configSchema.safeParse(content)
  if (parsed.success) return { ok: true, config: parsed.data }
  const draft = draftSchema.safeParse(content)
  if (draft.success) return { ok: false, error: { code: 'unfinished', draft: draft.data } }
  return {
    ok: false,
    error: { code: 'invalid', issue: parsed.error.issues.slice(0, 3).map(issueText).join('; ') },
  }
}

/** Never the value itself, which may be a secret. */
const issueText = ({ path, message }: z.core.$ZodIssue): string =>
  path.length === 0 ? message : `${path.map(String).join('.')}: ${message}`
