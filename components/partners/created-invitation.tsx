import { ShownOnce, Time } from '@/components/ui'
import type { CreatedInvitation } from '@/lib/data/partner-dto'

/** The one time the code of an invitation is seen. */
export function CreatedInvitationSheet({
  invitation,
  onDone,
}: {
  invitation: CreatedInvitation
  onDone: () => void
}) {
  return (
    <ShownOnce
      heading="The invitation, shown this once"
      label="Invitation"
      text={invitation.code}
      onDone={onDone}
    >
      It is good for one team and closes at <Time at={invitation.expiresAt} show="both" />. An owner of that
      team enters it on the page Overlays, under “Join with an invitation”.
    </ShownOnce>
  )
}
