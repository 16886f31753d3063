import { Outcome } from '@/components/ui'
import type { FormState } from '@/lib/http/form-state'

/** What became of the last submission, where a field does not say it already. */
export function FormOutcome({ state }: { state: FormState<unknown> }) {
  if (state.status !== 'failed') return null
  const { problem } = state
  return (
    <Outcome ok={false}>
      {problem.errors?.length
        ? 'Not saved: correct the marked fields.'
        : `${problem.title}. ${problem.detail}`}
    </Outcome>
  )
}
