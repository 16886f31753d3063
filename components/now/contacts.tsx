'use client'

import { usePartners } from '@/components/live/hooks'
import type { Overlay } from '@/lib/data/dto'

/** Whom to call: at one's own side, and at the other ones. */
export function Contacts({ overlay }: { overlay: Overlay }) {
  const partners = usePartners(overlay.shared ? overlay.slug : null)
  const teams = partners.data?.teams.filter(({ contact }) => contact !== null) ?? []
  if (!overlay.shared)
    return overlay.contact ? (
      <p className="mt-4 max-w-2xl break-words">
        <span className="text-soft">Contact: </span>
        {overlay.contact}
      </p>
    ) : null
  if (teams.length === 0) return null
  return (
    <dl className="mt-4 max-w-2xl">
      {teams.map(({ team, contact, yours }) => (
        <div key={team.slug} className="break-words">
          <dt className="inline text-soft">
            Contact at {team.name}
            {yours ? ' (yours)' : ''}:{' '}
          </dt>
          <dd className="inline">{contact}</dd>
        </div>
      ))}
    </dl>
  )
}
