import type { ZodType } from 'zod'
import { type Problem, problemSchema } from '@/lib/data/dto'

/** A request that did not give what was asked for, with what a person may be told. */
export class ApiError extends Error {
  constructor(
    readonly code: string,
    readonly status: number | null,
    message: string,
  ) {
    super(message)
    this.name = 'ApiError'
  }

  /** Asking again can help: the network or the server failed, not the question. */
  get retry(): boolean {
    return this.status === null || this.status >= 500 || this.status === 429
  }
}

export async function getJson<T>(path: string, schema: ZodType<T>, init?: RequestInit): Promise<T> {
  const response = await reach(path, init)
  const body: unknown = await response.json().catch(() => null)
  if (!response.ok) throw refusal(response.status, body)
  const parsed = schema.safeParse(body)
  if (!parsed.success) {
    throw new ApiError('unknown-shape', response.status, 'The page is older than the server. Load it again.')
  }
  return parsed.data
}

/** Asks with a body; changes nothing on the server. */
export async function askJson<T>(path: string, body: unknown, schema: ZodType<T>): Promise<T> {
  return getJson(path, schema, {
    method: 'POST',
    headers: { accept: 'application/json', 'content-type': 'application/json' },
    body: JSON.stringify(body),
  })
}

interface Paged<T> {
  items: T[]
  next: string | null
}

/** Follows `next` to the end. */
export async function getAll<T>(path: string, schema: ZodType<Paged<T>>): Promise<T[]> {
  const items: T[] = []
  let next: string | null = null
  do {
    const mark = path.includes('?') ? '&' : '?'
    const query: string = next === null ? '' : `${mark}after=${encodeURIComponent(next)}`
    const page: Paged<T> = await getJson(`${path}${query}`, schema)
    items.push(...page.items)
    next = page.next
  } while (next !== null)
  return items
}

async function reach(path: string, init?: RequestInit): Promise<Response> {
  try {
    return await fetch(path, { headers: { accept: 'application/json' }, cache: 'no-store', ...init })
  } catch {
    throw new ApiError('unreachable', null, 'The server cannot be reached.')
  }
}

function refusal(status: number, body: unknown): ApiError {
  const parsed = problemSchema.safeParse(body)
  if (parsed.success) return new ApiError(parsed.data.code, status, sentence(parsed.data))
  if (status === 401) return new ApiError('signed-out', status, 'Your session has ended. Sign in again.')
  return new ApiError('failed', status, `The server answered ${status}.`)
}

function sentence(problem: Problem): string {
  return problem.detail || problem.title
}
