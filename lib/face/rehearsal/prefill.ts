import { z } from 'zod'
import { type Excluded, excludedSchema } from '@/lib/data/rehearsal-dto'

/** What the form begins with, from an address: other pages link to it. */
export interface Prefill {
  exclude: Excluded
  /** A maintenance window whose nodes are to be taken. */
  window: string | null
  incident: number | null
  /** A rehearsal to begin from. */
  from: string | null
}

type Asked = Partial<Omit<Prefill, 'exclude'>> & { exclude?: z.input<typeof excludedSchema> }

const many = z
  .union([z.string(), z.array(z.string())])
  .optional()
  .transform((value) => (value === undefined ? [] : [value].flat()))
const one = many.transform(([first]) => first ?? null)

const linkSchema = z.string().transform((text, context): [string, string] => {
  const [a, b, ...more] = text.split('\n')
  if (a && b && more.length === 0) return [a, b]
  context.addIssue({ code: 'custom', message: 'Two names, a line each.' })
  return z.NEVER
})
const labelSchema = z.string().transform((text) => {
  const at = text.indexOf('=')
  return { key: text.slice(0, Math.max(0, at)), value: text.slice(at + 1) }
})

const querySchema = z.object({
  node: many,
  label: many.pipe(z.array(labelSchema)),
  link: many.pipe(z.array(linkSchema)),
  window: one,
  incident: one.transform((text) => (text === null ? null : Number(text))),
  from: one,
})

/** Of an address that is no such question nothing is taken: the form is empty then. */
export function prefillOf(query: Readonly<Record<string, string | string[] | undefined>>): Prefill {
  const read = querySchema.safeParse(query)
  const { node = [], label = [], link = [], window = null, incident = null, from = null } = read.data ?? {}
  const exclude = excludedSchema.safeParse({ nodes: node, labels: label, links: link })
  return {
    exclude: exclude.data ?? excludedSchema.parse({}),
    window,
    incident: incident !== null && Number.isInteger(incident) && incident > 0 ? incident : null,
    from,
  }
}

/** The page with the form filled in. */
export function rehearseHref(slug: string, { exclude, window, incident, from }: Asked): string {
  const query = new URLSearchParams()
  for (const name of exclude?.nodes ?? []) query.append('node', name)
  for (const { key, value } of exclude?.labels ?? []) query.append('label', `${key}=${value}`)
  for (const pair of exclude?.links ?? []) query.append('link', pair.join('\n'))
  if (window) query.set('window', window)
  if (incident) query.set('incident', String(incident))
  if (from) query.set('from', from)
  const text = query.toString()
  return `${rehearsalsPage(slug)}${text ? `?${text}` : ''}`
}

export const rehearsalsPage = (slug: string): string => `/overlays/${encodeURIComponent(slug)}/rehearsals`
export const rehearsalPage = (slug: string, id: string): string =>
  `${rehearsalsPage(slug)}/${encodeURIComponent(id)}`
