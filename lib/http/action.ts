import 'server-only'
import { cookies, headers } from 'next/headers'
import type { z } from 'zod'
import { authenticate } from '@/lib/auth/authenticate'
import type { CookieToSet } from '@/lib/auth/cookie'
import type { ActionName } from '@/lib/auth/permissions'
import { AppError } from './app-error'
import type { Call } from './call'
import type { FormState } from './form-state'
import { perform } from './perform'
import { invalidInput, toProblem } from './problem'
import { requestFacts } from './request-facts'
import { getRuntime } from './runtime'
import { assertStorable } from './storable'

export interface ActionHandler<T> {
  (previous: FormState<T>, form: FormData): Promise<FormState<T>>
  /** The row of the permission table; a test looks for it on every exported action. */
  permission: ActionName
}

export interface ActionOptions<T, I> {
  /** See `Performance`. */
  before?: (call: Call, input: I) => Promise<void>
  /** After the work is stored: redirect(), revalidatePath(), cookies. What it throws reaches Next. */
  after?: (value: T) => void | Promise<void>
}

/**
 * Wraps a server action in the form that useActionState takes. The form's fields are parsed by `schema`
 * (everything arrives as text: use z.coerce for numbers); problems come back as state, not as exceptions.
 */
export function action<T, S extends z.ZodType>(
  name: ActionName,
  schema: S,
  run: (call: Call, input: z.output<S>) => Promise<T>,
  { before, after }: ActionOptions<T, z.output<S>> = {},
): ActionHandler<T> {
  const handler = async (_previous: FormState<T>, form: FormData): Promise<FormState<T>> => {
    const fields = formFields(form)
    let value: T
    try {
      value = await runAction(name, schema, { before, run }, fields)
    } catch (error) {
      return { status: 'failed', problem: toProblem(error), values: withoutSecrets(fields) }
    }
    await after?.(value)
    return { status: 'done', value }
  }
  return Object.assign(handler, { permission: name })
}

async function runAction<T, S extends z.ZodType>(
  name: ActionName,
  schema: S,
  work: {
    before?: (call: Call, input: z.output<S>) => Promise<void>
    run: (call: Call, input: z.output<S>) => Promise<T>
  },
  fields: Record<string, string>,
): Promise<T> {
  const runtime = getRuntime()
  const facts = requestFacts(await headers(), 'POST', runtime)
  let renewed: CookieToSet | null = null
  const value = await perform(runtime, {
    action: name,
    facts,
    authenticate: async (em, now) => {
      if (facts.foreign)
        throw new AppError('wrong-origin', 'Open the page on this server and send the form again.')
      // Tokens are for programs: an action serves the page it is on.
      const result = await authenticate(em, { ...facts, bearer: null }, now, { mayRenew: true })
      renewed = result.renewed
      return result.caller
    },
    before: async (call) => work.before?.(call, parse(schema, fields)),
    run: (call) => work.run(call, parse(schema, fields)),
  })
  if (renewed) await setCookie(renewed)
  return value
}

function parse<S extends z.ZodType>(schema: S, fields: Record<string, string>): z.output<S> {
  assertStorable(fields)
  const parsed = schema.safeParse(fields)
  if (!parsed.success) throw invalidInput(parsed.error)
  return parsed.data
}

export async function setCookie({ name, value, options }: CookieToSet): Promise<void> {
  const jar = await cookies()
  jar.set(name, value, options)
}

/** Text fields only; names beginning with $ are the framework's. */
function formFields(form: FormData): Record<string, string> {
  const fields: Record<string, string> = {}
  for (const [name, value] of form)
    if (typeof value === 'string' && !name.startsWith('$')) fields[name] = value
  return fields
}

function withoutSecrets(fields: Record<string, string>): Record<string, string> {
  return Object.fromEntries(Object.entries(fields).filter(([name]) => !/password|token|code/i.test(name)))
}
