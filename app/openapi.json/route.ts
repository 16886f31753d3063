import { authorise } from '@/lib/http/call'
import { route } from '@/lib/http/route'
import { openApiDocument } from '@/lib/openapi'
import { PATHS } from './paths'

/** The interface for programs, described for programs. */
export const GET = route('openapi.read', {}, async (call) => {
  authorise(call, 'openapi.read')
  return openApiDocument(PATHS)
})
