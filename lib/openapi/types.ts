import type { RouteHandler } from '@/lib/http/route'
import type { AnswerName } from './schemas'

export const METHODS = ['GET', 'POST', 'PUT', 'PATCH', 'DELETE'] as const
export type Method = (typeof METHODS)[number]

/** What is said of one method of a route beyond what the route itself knows. */
export interface Said {
  does: string
  /** Name of the answer's schema; null where there is no body. */
  answers: AnswerName | null
  /** It can also be asked for as a stream of events. */
  streams?: boolean
}

/** One path of the interface for programs. */
export interface PathRow {
  /** Below /api/v1, with parameters in braces. */
  path: string
  methods: readonly (Said & { method: Method; handler: RouteHandler })[]
}
