import { AppError } from '@/lib/http'
import type { Call } from '@/lib/http/call'

const codeOf = (error: unknown) => (error instanceof AppError ? error.code : String(error))

class Undone extends Error {}

/** As the wrappers run it, in one transaction, which is undone afterwards. */
export async function tried<T>(
  call: Call,
  run: (call: Call) => Promise<T>,
): Promise<{ value?: T; refused?: string }> {
  const outcome: { value?: T; refused?: string } = {}
  await call.em
    .transactional(
      async (tx) => {
        outcome.value = await run({ ...call, em: tx })
        throw new Undone()
      },
      { clear: true },
    )
    .catch((error: unknown) => {
      if (!(error instanceof Undone)) outcome.refused = codeOf(error)
    })
  return outcome
}
