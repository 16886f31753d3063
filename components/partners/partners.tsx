'use client'

import { useState } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useOverlay, usePartners } from '@/components/live/hooks'
import { Coverage } from '@/components/now/coverage'
import { FailedState, PageHeading, Sheet, Waiting } from '@/components/ui'
import type { CreatedInvitation } from '@/lib/data/partner-dto'
import { formatCount } from '@/lib/face/format'
import { CreatedInvitationSheet } from './created-invitation'
import { InvitationsTable } from './invitations-table'
import { NewInvitation } from './new-invitation'
import { PartForm } from './part-form'
import { SeenNotes } from './seen-notes'
import { TeamsTable } from './teams-table'
import type { PartnerActions } from './types'

/** Who shares the overlay, and what each team shows the others. */
export function Partners({ slug, actions }: { slug: string; actions: PartnerActions }) {
  const partners = usePartners(slug)
  const overlay = useOverlay(slug)
  const [created, setCreated] = useState<CreatedInvitation | null>(null)
  const known = partners.data
  const mine = known?.teams.find(({ team }) => team.slug === overlay.data?.as?.slug)
  return (
    <>
      <PageHeading
        title="Partners"
        actions={
          known?.may.invite ? (
            <NewInvitation
              slug={slug}
              invite={actions.invite}
              onCreated={(invitation) => {
                setCreated(invitation)
                partners.retry()
              }}
            />
          ) : null
        }
      >
        Teams that share this overlay. Each adds agents of its own, sees its own nodes by name and those of
        others under names that only it uses, and is warned by rules of its own.
      </PageHeading>
      <div className="space-y-5">
        <Coverage slug={slug} />
        {created ? <CreatedInvitationSheet invitation={created} onDone={() => setCreated(null)} /> : null}
        {!known ? (
          partners.error ? (
            <FailedState title="The partners could not be loaded." onRetry={partners.retry}>
              {partners.error.message}
            </FailedState>
          ) : (
            <Waiting label="Loading the partners" className="h-72" />
          )
        ) : (
          <>
            <Freshness of={partners} />
            <Sheet heading="Who shares it" aside={formatCount(known.teams.length, 'team')}>
              <TeamsTable slug={slug} partners={known} end={actions.end} onDone={partners.retry} />
            </Sheet>
            {mine ? (
              <Sheet heading="What your team shows" aside={mine.team.name}>
                <PartForm
                  // Starts anew from what is stored, also where somebody else changed it.
                  key={JSON.stringify([mine.contact, mine.sharedLabels, known.ownLabels])}
                  slug={slug}
                  mine={mine}
                  ownLabels={known.ownLabels}
                  change={known.may.change ? actions.change : null}
                  onDone={() => {
                    partners.retry()
                    overlay.retry()
                  }}
                />
              </Sheet>
            ) : null}
            {known.invitations ? (
              <Sheet heading="Invitations">
                <InvitationsTable
                  slug={slug}
                  invitations={known.invitations}
                  withdraw={known.may.invite ? actions.withdraw : null}
                  onDone={partners.retry}
                />
              </Sheet>
            ) : null}
            <SeenNotes />
          </>
        )}
      </div>
    </>
  )
}
