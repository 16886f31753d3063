'use client'

import { Freshness } from '@/components/live/freshness'
import { useIncident } from '@/components/live/hooks'
import { Note } from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import { ROLES } from '@/lib/data/dto'
import type { IncidentWhole } from '@/lib/data/warn-dto'
import { FilesSheet } from './files-sheet'
import { IncidentHead } from './incident-head'
import { StretchThenNow } from './stretch-then-now'
import { TimelineSheet } from './timeline-sheet'
import { ToldSheet } from './told-sheet'
import type { IncidentActions } from './types'

/** One incident: what it is and who has it first, then the drawing, what happened, and what is kept of it. */
export function IncidentPage({ initial, actions }: { initial: IncidentWhole; actions: IncidentActions }) {
  const live = useIncident(initial.number)
  const incident = live.data ?? initial
  const role = ROLES.find((one) => one === incident.role) ?? 'viewer'
  const may = roleReaches(role, 'operator')
  return (
    <div className="space-y-5">
      <Freshness of={live} />
      <IncidentHead incident={incident} may={may} actions={actions} onDone={live.retry} />
      <StretchThenNow slug={incident.overlay.slug} momentAt={incident.momentAt} />
      <div className="grid gap-5 lg:grid-cols-[minmax(0,3fr)_minmax(0,2fr)] lg:items-start">
        <TimelineSheet incident={incident} note={may ? actions.note : null} onDone={live.retry} />
        <div className="space-y-5">
          <ToldSheet incident={incident} />
          <FilesSheet incident={incident} may={may} onDone={live.retry} />
        </div>
      </div>
      <Note className="max-w-4xl">
        What stands here is what agents measured and what people wrote down. A warning is never the only
        safeguard where an outage can hurt people; local rules and qualified staff come first.
      </Note>
    </div>
  )
}
