'use client'

import { Freshness } from '@/components/live/freshness'
import { useOverlay, useUpgrades } from '@/components/live/hooks'
import { Coverage } from '@/components/now/coverage'
import { FailedState, PageHeading, Sheet, Waiting } from '@/components/ui'
import { type Role, roleReaches } from '@/lib/auth/permissions'
import { notCurrent } from '@/lib/face/upkeep'
import { KeySheet } from './key-sheet'
import { OfferForm } from './offer-form'
import { OffersTable } from './offers-table'
import { RetireForm } from './retire-form'
import type { UpkeepActions } from './types'
import { VersionTables } from './version-tables'

/** What keeps an overlay's agents in order: versions, those that are gone, the key they all trust. */
export function Upkeep({
  slug,
  role,
  isOwning,
  actions,
}: {
  slug: string
  role: Role
  /** The reader's team owns the overlay: its settings and its key are theirs. */
  isOwning: boolean
  actions: UpkeepActions
}) {
  const may = roleReaches(role, 'operator')
  return (
    <>
      <PageHeading title="Upkeep">
        Which versions the agents run, what becomes of agents that are gone, and the key they all trust.
      </PageHeading>
      <div className="space-y-5">
        <Coverage slug={slug} />
        <Upgrading slug={slug} may={may} actions={actions} />
        <Gone slug={slug} may={may && isOwning} actions={actions} />
        {isOwning ? <KeySheet slug={slug} role={role} rotate={actions.rotateKey} /> : null}
      </div>
    </>
  )
}

function Upgrading({ slug, may, actions }: { slug: string; may: boolean; actions: UpkeepActions }) {
  const upgrades = useUpgrades(slug)
  if (!upgrades.data)
    return (
      <Sheet heading="Versions">
        {upgrades.error ? (
          <FailedState quiet title="The versions could not be loaded." onRetry={upgrades.retry}>
            {upgrades.error.message}
          </FailedState>
        ) : (
          <Waiting label="Loading the versions" className="h-64" />
        )}
      </Sheet>
    )
  const behind = notCurrent(upgrades.data)
  return (
    <>
      <Sheet
        heading="Versions"
        aside={
          behind === null
            ? null
            : behind === 0
              ? 'all agents run the current one'
              : `${behind} not on the current one`
        }
      >
        <Freshness of={upgrades} />
        <VersionTables slug={slug} upgrades={upgrades.data} />
      </Sheet>
      <Sheet heading="Upgrades" aside={may ? 'offered to a part first, then to all' : null}>
        <div className="space-y-6">
          <OffersTable
            slug={slug}
            offers={upgrades.data.offers}
            halt={may ? actions.halt : null}
            onDone={upgrades.retry}
          />
          {may ? (
            <OfferForm slug={slug} upgrades={upgrades.data} offer={actions.offer} onDone={upgrades.retry} />
          ) : null}
        </div>
      </Sheet>
    </>
  )
}

function Gone({ slug, may, actions }: { slug: string; may: boolean; actions: UpkeepActions }) {
  const overlay = useOverlay(slug)
  return (
    <Sheet heading="Agents that are gone">
      {overlay.data ? (
        <RetireForm
          // Starts anew from what is stored, also where somebody else changed it.
          key={String(overlay.data.retireAfterHours)}
          slug={slug}
          hours={overlay.data.retireAfterHours ?? null}
          save={may ? actions.retireAfter : null}
          onDone={overlay.retry}
        />
      ) : overlay.error ? (
        <FailedState quiet title="The setting could not be loaded." onRetry={overlay.retry}>
          {overlay.error.message}
        </FailedState>
      ) : (
        <Waiting label="Loading the setting" className="h-24" />
      )}
    </Sheet>
  )
}
