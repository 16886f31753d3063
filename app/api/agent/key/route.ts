import { changeKey, proveKeyChange } from '@/lib/collector/key-change'
import { route } from '@/lib/http/route'
import { keyChangeRequestSchema } from '@/lib/protocol'

/** A repeated request gets the same answer: the first may have been lost. */
export const POST = route(
  'agent.key',
  { body: keyChangeRequestSchema, authenticate: (em, { body }, now) => proveKeyChange(em, body, now) },
  (call, { body }) => changeKey(call, body),
)
