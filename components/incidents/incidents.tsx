'use client'

import { useState } from 'react'
import { Freshness } from '@/components/live/freshness'
import { type Live, useIncidents } from '@/components/live/hooks'
import { Button, EmptyState, FailedState, Note, PageHeading, Sheet, Waiting } from '@/components/ui'
import { INCIDENTS_MOST } from '@/lib/data/incident-dto'
import type { Incident } from '@/lib/data/warn-dto'
import { incidentsSentence } from '@/lib/face/incidents'
import { IncidentsTable } from './incidents-table'

const FIRST = 50

type Page = Live<{ items: Incident[]; next: string | null }>

/** What is open, who has it, and what was. */
export function Incidents({ showTeam }: { showTeam: boolean }) {
  const [most, setMost] = useState(FIRST)
  const open = useIncidents('unresolved', INCIDENTS_MOST)
  const resolved = useIncidents('resolved', most)
  return (
    <>
      <PageHeading title={open.data ? incidentsSentence(open.data.items) : 'Incidents'}>
        Each is what the rules of one overlay have raised since it was last well: raised, told, held by
        somebody, cleared, resolved.
      </PageHeading>
      <div className="space-y-5">
        <Freshness of={open} />
        <Sheet heading="Not resolved">
          <Table
            page={open}
            caption="Incidents that are not resolved"
            csvName="incidents"
            showTeam={showTeam}
            empty={
              <EmptyState title="Nothing is open.">
                Incidents appear here when a rule of an overlay is raised. Which rules there are, and who is
                told, stands on the overlay’s Warnings page.
              </EmptyState>
            }
          />
        </Sheet>
        <Sheet heading="Resolved" aside={resolved.data?.next ? `the newest ${most}` : null}>
          <Table
            page={resolved}
            caption="Resolved incidents"
            csvName="incidents-resolved"
            showTeam={showTeam}
            empty={<EmptyState title="No incident has been resolved yet." />}
          />
          {resolved.data?.next && most < INCIDENTS_MOST ? (
            <div className="mt-3">
              <Button onClick={() => setMost(INCIDENTS_MOST)}>Show up to {INCIDENTS_MOST}</Button>
            </div>
          ) : null}
        </Sheet>
        <Note className="max-w-4xl">
          Warnings rest on what agents measure and on mail, telephone and this server working. Never make them
          the only safeguard where an outage can hurt people; local rules and qualified staff come first.
        </Note>
      </div>
    </>
  )
}

function Table(props: {
  page: Page
  caption: string
  csvName: string
  showTeam: boolean
  empty: React.ReactNode
}) {
  const { page, ...table } = props
  if (page.data) return <IncidentsTable incidents={page.data.items} {...table} />
  if (!page.error) return <Waiting label="Loading the incidents" className="h-40" />
  return (
    <FailedState quiet title="The incidents could not be loaded." onRetry={page.retry}>
      {page.error.message}
    </FailedState>
  )
}
