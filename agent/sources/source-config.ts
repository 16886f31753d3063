import { z } from 'zod'
import { parsePath } from './path-expression'

export const DEFAULT_EVERY_SECONDS = 30
const everySeconds = z.number().min(1, 'At least every second.').max(86_400)
/** Where the addresses are in JSON; see `path-expression.ts`. */
const at = z
  .string()
  .max(300)
  .superRefine((text, context) => {
    const path = parsePath(text)
    if (!path.ok) context.addIssue({ code: 'custom', message: path.issue })
  })

export const sourceConfigSchema = z.discriminatedUnion(
  'kind',
  [
    z.object({ kind: z.literal('list'), items: z.array(z.string().min(1).max(300)) }),
    z.object({
      kind: z.literal('file'),
      path: z.string().min(1),
      at: at.optional(),
      everySeconds: everySeconds.optional(),
    }),
    z.object({
      kind: z.literal('command'),
      /** Program and arguments; no shell in between. */
      command: z.array(z.string()).min(1, 'Give the program first.'),
      at: at.optional(),
      everySeconds: everySeconds.optional(),
    }),
    z.object({
      kind: z.literal('srv'),
      name: z.string().min(1).max(255),
      everySeconds: everySeconds.optional(),
    }),
    z.object({
      kind: z.literal('http'),
      url: z.url({ protocol: /^https?$/, error: 'Give an http:// or https:// address.' }),
      at: at.optional(),
      everySeconds: everySeconds.optional(),
    }),
  ],
  { error: 'kind is one of list, file, command, srv, http' },
)
/** Where the overlay's own neighbours are learnt from. */
export type SourceConfig = z.infer<typeof sourceConfigSchema>

type Read = { ok: true; source: SourceConfig } | { ok: false; issue: string }

const FORMS = 'list:A,B file:PATH command:LINE srv:NAME http://…'

/** A source as one word of a command line. */
export function readSource(text: string, more: { at: string | null; everySeconds: number | null }): Read {
  const colon = text.indexOf(':')
  const [kind, rest] = [text.slice(0, colon), text.slice(colon + 1)]
  const every = more.everySeconds === null ? {} : { everySeconds: more.everySeconds }
  const where = more.at === null ? {} : { at: more.at }
  const raw = {
    list: { kind, items: rest.split(',').filter((item) => item !== '') },
    file: { kind, path: rest, ...where, ...every },
    command: { kind, command: ['/bin/sh', '-c', rest], ...where, ...every },
    srv: { kind, name: rest, ...every },
    http: { kind: 'http', url: text, ...where, ...every },
    https: { kind: 'http', url: text, ...where, ...every },
  }
  const found = Object.entries(raw).find(([name]) => name === kind)?.[1]
  if (!found || rest === '') return { ok: false, issue: `"${text}" is no source. Forms: ${FORMS}` }
  const parsed = sourceConfigSchema.safeParse(found)
  if (parsed.success) return { ok: true, source: parsed.data }
  const issue = parsed.error.issues[0]
  return { ok: false, issue: issue ? `${issue.path.join('.')}: ${issue.message}` : 'not a source' }
}
