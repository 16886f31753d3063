import type { PathRow } from '@/lib/openapi'
import { ACTING } from './paths-acting'
import { KEEPING } from './paths-keeping'
import { SEEING } from './paths-seeing'

/** Every route below app/api/v1; a test finds those that are missing. */
export const PATHS: readonly PathRow[] = [...SEEING, ...ACTING, ...KEEPING]
