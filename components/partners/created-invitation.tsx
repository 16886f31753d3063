'use client'

import { useEffect, useRef } from 'react'
import { Button, CommandBlock, Time } from '@/components/ui'
import type { CreatedInvitation } from '@/lib/data/partner-dto'

/** The one time the code of an invitation is seen. */
export function CreatedInvitationSheet({
  invitation,
  onDone,
}: {
  invitation: CreatedInvitation
  onDone: () => void
}) {
  const top = useRef<HTMLElement>(null)
  useEffect(() => {
    top.current?.focus()
  }, [invitation.id])
  return (
    <section
      ref={top}
      tabIndex={-1}
      aria-labelledby="created-invitation"
      className="border-2 border-ink bg-sheet px-4 py-5 outline-none sm:px-6"
    >
      <h2 id="created-invitation" className="text-lg">
        The invitation, shown this once
      </h2>
      <p className="mt-1 mb-4 max-w-2xl text-soft">
        Only its fingerprint is kept. It is good for one team and closes at{' '}
        <Time at={invitation.expiresAt} show="both" />. An owner of that team enters it on the page Overlays,
        under “Join with an invitation”.
      </p>
      <CommandBlock label="Invitation" text={invitation.code} />
      <div className="mt-5">
        <Button onClick={onDone}>I have it, hide the code</Button>
      </div>
    </section>
  )
}
