'use client'

import Link from 'next/link'
import { useOpenIncidents } from '@/components/live/hooks'
import { useNow } from '@/components/ui'
import { incidentLine, isMuted } from '@/lib/face/incidents'
import { incidentUrls } from '@/lib/face/urls'

/** What is open of this overlay and who has it; nothing while nothing is. */
export function IncidentLines({ slug }: { slug: string }) {
  const incidents = useOpenIncidents(slug)
  const now = useNow()
  if (!incidents.data || incidents.data.length === 0 || now === null) return null
  return (
    <ul aria-label="Open incidents" className="border-2 border-ink bg-sheet">
      {incidents.data.map((incident) => (
        <li key={incident.id} className="border-t border-hairline first:border-t-0">
          <Link
            href={incidentUrls(incident.number).page}
            className="block min-h-11 px-4 py-2.5 break-words no-underline hover:underline"
          >
            <span className={incident.state === 'open' ? 'font-semibold' : undefined}>
              {incidentLine(incident, now)}
            </span>
            {isMuted(incident, now) ? <span className="text-soft"> Muted.</span> : null}
          </Link>
        </li>
      ))}
    </ul>
  )
}
