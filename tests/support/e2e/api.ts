import { z } from 'zod'
import {
  createdJoiningCodeSchema,
  cutSchema,
  eventsSchema,
  joiningCodeSchema,
  linksSchema,
  type NewOverlay,
  nodesSchema,
  overlaySchema,
  problemSchema,
  readingSchema,
  readingsSchema,
} from '@/lib/data/dto'
import { readStream } from '../streams'
import { ReadingStream } from './reading-stream'

/** What a program can do with /api/v1 as its documentation says: every answer is read by its schema. */
export class Api {
  readonly #url: string
  readonly #headers: Record<string, string>

  /** Who asks: a bearer token, or the cookie of a session with the origin a browser would send. */
  constructor(url: string, credentials: { token: string } | { cookie: string }) {
    this.#url = url
    this.#headers =
      'token' in credentials
        ? { authorization: `Bearer ${credentials.token}` }
        : { cookie: credentials.cookie, origin: url }
  }

  /** The answer as it is, for what should be refused. */
  send(method: string, path: string, body?: object): Promise<Response> {
    return fetch(`${this.#url}/api/v1${path}`, {
      method,
      headers: { ...this.#headers, ...(body ? { 'content-type': 'application/json' } : {}) },
      body: body ? JSON.stringify(body) : undefined,
    })
  }

  overlays = () => this.#get('/overlays', z.object({ items: z.array(overlaySchema) }))
  createOverlay = (body: NewOverlay) => this.#post('/overlays', body, overlaySchema)
  createJoiningCode = (slug: string, body: { uses: number; expiresInHours?: number }) =>
    this.#post(`/overlays/${slug}/joining-codes`, body, createdJoiningCodeSchema)
  joiningCodes = (slug: string) =>
    this.#get(`/overlays/${slug}/joining-codes`, z.object({ items: z.array(joiningCodeSchema) }))
  reading = (slug: string) => this.#get(`/overlays/${slug}/reading`, readingSchema)
  readings = (slug: string, query: Record<string, string>) =>
    this.#get(`/overlays/${slug}/readings?${new URLSearchParams(query)}`, readingsSchema)
  cut = (slug: string) => this.#get(`/overlays/${slug}/cut`, cutSchema)
  nodes = (slug: string) => this.#get(`/overlays/${slug}/nodes`, nodesSchema)
  links = (slug: string) => this.#get(`/overlays/${slug}/links`, linksSchema)
  events = (slug: string) => this.#get(`/overlays/${slug}/events`, eventsSchema)

  /** The event stream of an overlay, until it is closed. */
  async follow(slug: string): Promise<ReadingStream> {
    const closing = new AbortController()
    const response = await fetch(`${this.#url}/api/v1/overlays/${slug}/events`, {
      headers: { ...this.#headers, accept: 'text/event-stream' },
      signal: closing.signal,
    })
    if (response.status !== 200) throw new Error(`The event stream was answered ${response.status}.`)
    return new ReadingStream(readStream(response), () => closing.abort())
  }

  async #get<T>(path: string, schema: z.ZodType<T>): Promise<T> {
    return read(await this.send('GET', path), 200, schema)
  }

  async #post<T>(path: string, body: object, schema: z.ZodType<T>): Promise<T> {
    return read(await this.send('POST', path, body), 201, schema)
  }
}

async function read<T>(response: Response, status: number, schema: z.ZodType<T>): Promise<T> {
  const body: unknown = await response.json()
  if (response.status === status) return schema.parse(body)
  const problem = problemSchema.safeParse(body)
  const said = problem.success ? `${problem.data.code}: ${problem.data.detail}` : JSON.stringify(body)
  throw new Error(`${response.url} answered ${response.status}, not ${status}. ${said}`)
}
