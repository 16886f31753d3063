'use client'

import { useState } from 'react'
import useSWR from 'swr'
import { z } from 'zod'
import { deliveriesSchema } from '@/lib/data/delivery-dto'
import {
  cutSchema,
  eventsSchema,
  joiningCodeSchema,
  linksSchema,
  nodesSchema,
  overlaySchema,
  type ReadingPoint,
  readingSchema,
  readingsSchema,
  signingKeySchema,
  upgradesSchema,
} from '@/lib/data/dto'
import { partnersSchema } from '@/lib/data/partner-dto'
import { type RehearsalDto, rehearsalSchema, rehearsalsSchema } from '@/lib/data/rehearsal-dto'
import { reinforcementSchema } from '@/lib/data/reinforcement-dto'
import { maintenanceWindowsSchema, warningRulesSchema } from '@/lib/data/rules-dto'
import { type Incident, incidentsSchema, incidentWholeSchema } from '@/lib/data/warn-dto'
import { linkStorySchema, momentsSchema, nodeStorySchema, weakPlaceSchema } from '@/lib/data/weak-dto'
import { type Range, rangeQuery, refreshMs } from '@/lib/face/range'
import { AGENT_FILE_URL, deliveriesUrl, INCIDENTS_URL, incidentUrls, overlayUrls } from '@/lib/face/urls'
import { ApiError, getAll, getJson } from './fetcher'
import { POLL_MS, useStreaming } from './live-provider'

/** What a component knows of one answer of the server. */
export interface Live<T> {
  /** The last good answer, kept while later attempts fail. */
  data: T | undefined
  error: ApiError | undefined
  /** When `data` came, in milliseconds since the epoch. */
  updatedAtMs: number | null
  retry: () => void
}

interface LiveOptions<T = unknown> {
  /** How often to ask while the stream is open: the stream says when, this is the net below it. */
  streamingMs?: number | ((latest: T | undefined) => number)
  /** How often to ask without a stream. */
  pollMs?: number
}

function useLive<T>(key: string | null, load: () => Promise<T>, options: LiveOptions<T> = {}): Live<T> {
  const streaming = useStreaming()
  const [seen, setSeen] = useState<{ data: T | undefined; atMs: number | null }>({
    data: undefined,
    atMs: null,
  })
  const { data, error, mutate } = useSWR<T, ApiError>(key, load, {
    refreshInterval: streaming ? (options.streamingMs ?? 60_000) : (options.pollMs ?? POLL_MS),
    dedupingInterval: 900,
    keepPreviousData: true,
    shouldRetryOnError: (e) => !(e instanceof ApiError) || e.retry,
    errorRetryInterval: POLL_MS,
  })
  // The stream also brings data, past the fetcher. Not in an effect: after a pause readings come in a burst, and a
  // further update behind each of them adds up until React takes it for a loop.
  if (seen.data !== data) setSeen({ data, atMs: data === undefined ? null : Date.now() })
  return { data, error, updatedAtMs: seen.atMs, retry: () => void mutate() }
}

export function useOverlay(slug: string | null) {
  const url = slug === null ? null : overlayUrls(slug).overlay
  return useLive(url, () => getJson(url ?? '', overlaySchema))
}

/** Null before the first reading. */
export function useReading(slug: string, options: LiveOptions = {}) {
  const url = overlayUrls(slug).reading
  return useLive(url, () => getJson(url, readingSchema).catch(nullBeforeFirst), options)
}

export function useCut(slug: string) {
  const url = overlayUrls(slug).cut
  return useLive(url, () => getJson(url, cutSchema).catch(nullBeforeFirst))
}

function nullBeforeFirst(error: unknown): null {
  if (error instanceof ApiError && error.code === 'no-reading') return null
  throw error
}

export function useNodes(slug: string) {
  const url = overlayUrls(slug).nodes
  return useLive(url, () => getAll(url, nodesSchema), { streamingMs: 15_000 })
}

/** Null asks nothing. */
export function useLinks(slug: string | null) {
  const url = slug === null ? null : overlayUrls(slug).links
  return useLive(url, () => getAll(url ?? '', linksSchema), { streamingMs: 15_000 })
}

export function useEvents(slug: string) {
  const url = overlayUrls(slug).events
  return useLive(url, async () => (await getJson(url, eventsSchema)).items)
}

const codesSchema = z.object({ items: z.array(joiningCodeSchema) })

export function useJoiningCodes(slug: string) {
  const url = overlayUrls(slug).codes
  return useLive(url, async () => (await getJson(url, codesSchema)).items)
}

/** Who took an upgrade changes with each report, which the stream does not tell of. */
const UPKEEP_MS = 10_000

export function useUpgrades(slug: string) {
  const url = overlayUrls(slug).upgrades
  return useLive(url, () => getJson(url, upgradesSchema), { streamingMs: UPKEEP_MS })
}

/** For operators and owners; null asks nothing. */
export function useSigningKey(slug: string | null) {
  const url = slug === null ? null : overlayUrls(slug).signingKey
  return useLive(url, () => getJson(url ?? '', signingKeySchema), { streamingMs: UPKEEP_MS })
}

/** Attempts come and go between what the stream tells of. */
const DELIVERIES_MS = 5_000

/** Of a team, or of one of its incidents. */
export function useDeliveries(of: { team?: string; incident?: string }) {
  const url = deliveriesUrl(of)
  return useLive(url, () => getJson(url, deliveriesSchema), { streamingMs: DELIVERIES_MS })
}

export function useRules(slug: string) {
  const url = overlayUrls(slug).rules
  return useLive(url, () => getJson(url, warningRulesSchema), { streamingMs: UPKEEP_MS })
}

export function useWindows(slug: string) {
  const url = overlayUrls(slug).windows
  return useLive(url, async () => (await getJson(url, maintenanceWindowsSchema)).items)
}

/** How far a rehearsal has come is not told by the stream; when it begins and ends is. */
const REHEARSING_MS = 1_500
const RESTING_MS = 15_000
const isRehearsing = ({ state, startsAt }: RehearsalDto): boolean =>
  state === 'running' || (state === 'waiting' && startsAt === null)

export function useRehearsals(slug: string) {
  const url = overlayUrls(slug).rehearsals
  return useLive(url, () => getJson(url, rehearsalsSchema), {
    streamingMs: (latest) => (latest?.items.some(isRehearsing) ? REHEARSING_MS : RESTING_MS),
  })
}

export function useRehearsal(slug: string, id: string) {
  const url = overlayUrls(slug).rehearsal(id)
  return useLive(url, () => getJson(url, rehearsalSchema), {
    streamingMs: (latest) => (!latest || isRehearsing(latest) ? REHEARSING_MS : RESTING_MS),
  })
}

/** The overlay's reading of a past moment; null asks nothing. */
export function useReadingThen(slug: string, at: string | null) {
  const url = at === null ? null : `${overlayUrls(slug).reading}?at=${encodeURIComponent(at)}`
  return useLive(url, () => getJson(url ?? '', readingSchema).catch(nullBeforeFirst), {
    streamingMs: 0,
    pollMs: 0,
  })
}

export function usePartners(slug: string | null) {
  const url = slug === null ? null : overlayUrls(slug).partners
  return useLive(url, () => getJson(url ?? '', partnersSchema), { streamingMs: UPKEEP_MS })
}

/** Worked out anew each time, which takes a moment. */
const REINFORCEMENT_MS = 60_000

export function useReinforcement(slug: string, query: string) {
  const url = `${overlayUrls(slug).reinforcement}?${query}`
  return useLive(url, () => getJson(url, reinforcementSchema), {
    streamingMs: REINFORCEMENT_MS,
    pollMs: REINFORCEMENT_MS,
  })
}

const agentFileSchema = z.object({ version: z.string(), sha256: z.string(), bytes: z.number().int() })

/** The agent's file as this server serves it now. */
export function useAgentFile() {
  return useLive(AGENT_FILE_URL, () => getJson(AGENT_FILE_URL, agentFileSchema))
}

export interface History {
  points: ReadingPoint[]
  fromMs: number
  toMs: number
  stepSeconds: number
  kept: ReadingPoint['kept']
}

/** Readings of the last while; the key holds the range, so that each look asks up to the present. */
export function useHistory(slug: string, range: Range) {
  const url = overlayUrls(slug).readings
  return useLive<History>(
    `${url}#${range.id}`,
    async () => {
      const { query, fromMs, toMs } = rangeQuery(range, Date.now())
      const { items, stepSeconds, kept } = await getJson(`${url}?${query}`, readingsSchema)
      return { points: items, fromMs, toMs, stepSeconds, kept }
    },
    { streamingMs: refreshMs(range) },
  )
}

/** Those of an overlay that are not resolved: one for each of the caller's teams at most. */
export function useOpenIncidents(slug: string): Live<Incident[]> {
  const url = overlayUrls(slug).incidents
  return useLive(url, async () => (await getJson(`${url}?state=unresolved`, incidentsSchema)).items)
}

/** Of all the caller's teams: what is not resolved, or the newest of what is. */
export function useIncidents(state: 'unresolved' | 'resolved', most: number) {
  const url = `${INCIDENTS_URL}?state=${state}&limit=${most}`
  return useLive(url, () => getJson(url, incidentsSchema), { pollMs: 10_000 })
}

export function useIncident(number: number) {
  const url = incidentUrls(number).incident
  return useLive(url, () => getJson(url, incidentWholeSchema), { streamingMs: 15_000 })
}

/** The drawing of a past moment, which does not change any more. */
export function usePast(slug: string, at: string) {
  const urls = overlayUrls(slug)
  const query = `?at=${encodeURIComponent(at)}`
  return useLive(
    `${urls.nodes}${query}`,
    async () => {
      const [nodes, cut, reading] = await Promise.all([
        getJson(`${urls.nodes}${query}&limit=1000`, nodesSchema),
        getJson(`${urls.cut}${query}`, cutSchema),
        getJson(`${urls.reading}${query}`, readingSchema),
      ])
      return { nodes: nodes.items, cut, reading }
    },
    { streamingMs: 0, pollMs: 0 },
  )
}

/** The present changes with each reading, but what is told of it takes its time; a past moment never changes. */
const nowOr = (at: string | null): LiveOptions =>
  at === null ? { streamingMs: UPKEEP_MS, pollMs: UPKEEP_MS } : { streamingMs: 0, pollMs: 0 }

function atQuery(at: string | null): Record<string, string> {
  return at === null ? {} : { at }
}

/** Now, or at a past moment, with the courses of links over so long before. */
export function useWeakPlace(slug: string, range: Range, at: string | null) {
  const url = `${overlayUrls(slug).weak}?${new URLSearchParams({ last: range.id, ...atQuery(at) })}`
  return useLive(url, () => getJson(url, weakPlaceSchema), nowOr(at))
}

export function useNodesAt(slug: string, at: string | null) {
  const url = overlayUrls(slug).nodes
  const key = at === null ? url : `${url}?${new URLSearchParams({ limit: '1000', ...atQuery(at) })}`
  return useLive(key, () => getAll(key, nodesSchema), at === null ? { streamingMs: 15_000 } : nowOr(at))
}

/** A new one is kept each minute. */
const MOMENTS_MS = 30_000

export function useKeptMoments(slug: string, range: Range) {
  const url = `${overlayUrls(slug).moments}?last=${range.id}`
  return useLive(url, async () => (await getJson(url, momentsSchema)).items, { streamingMs: MOMENTS_MS })
}

export function useNodeStory(slug: string, name: string, range: Range) {
  const url = `${overlayUrls(slug).node(name)}?last=${range.id}`
  return useLive(url, () => getJson(url, nodeStorySchema), { streamingMs: UPKEEP_MS })
}

export function useLinkStory(slug: string, ends: { a: string; b: string }, range: Range) {
  const url = `${overlayUrls(slug).link(ends.a, ends.b)}?last=${range.id}`
  return useLive(url, () => getJson(url, linkStorySchema), { streamingMs: UPKEEP_MS })
}
