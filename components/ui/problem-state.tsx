import type { Problem } from '@/lib/data/dto'
import { LinkButton } from './button'
import { FailedState } from './states'

/** A refusal or failure that came with a sentence of its own. */
export function ProblemState({ problem }: { problem: Problem }) {
  return (
    <FailedState title={problem.title} actions={<LinkButton href="/overlays">Go to the overlays</LinkButton>}>
      {problem.detail}
    </FailedState>
  )
}
