import { ShownOnce, Time } from '@/components/ui'
import type { CreatedJoiningCode } from '@/lib/data/dto'
import { formatCount } from '@/lib/face/format'

/** The one time a code is seen. */
export function CreatedCode({ code, onDone }: { code: CreatedJoiningCode; onDone: () => void }) {
  return (
    <ShownOnce heading="The code, shown this once" label="Joining code" text={code.code} onDone={onDone}>
      It is good for {formatCount(code.uses, 'agent')} and closes at <Time at={code.expiresAt} show="both" />.
      The commands below have it in its place.
    </ShownOnce>
  )
}
