import type { Metadata } from 'next'
import { notFound } from 'next/navigation'
import { IncidentPage } from '@/components/incidents/incident-page'
import { LiveProvider } from '@/components/live/live-provider'
import { ProblemState } from '@/components/ui'
import { incidentNumberSchema } from '@/lib/data/incident-dto'
import { getIncident } from '@/lib/data/incidents'
import { page } from '@/lib/http'
import {
  handOverAction,
  muteAction,
  noteAction,
  reopenAction,
  resolveAction,
  takeAction,
  unmuteAction,
} from '../actions'

interface Props {
  params: Promise<{ number: string }>
}

export async function generateMetadata({ params }: Props): Promise<Metadata> {
  return { title: `Incident ${(await params).number}` }
}

export default async function IncidentRoute({ params }: Props) {
  const number = incidentNumberSchema.safeParse((await params).number)
  if (!number.success) notFound()
  const incident = await page('incident.read', (call) => getIncident(call, number.data))
  if (!incident.ok) return <ProblemState problem={incident.problem} />
  const { slug } = incident.value.overlay
  return (
    <LiveProvider key={slug} slug={slug}>
      <IncidentPage
        initial={incident.value}
        actions={{
          take: takeAction,
          handOver: handOverAction,
          note: noteAction,
          mute: muteAction,
          unmute: unmuteAction,
          resolve: resolveAction,
          reopen: reopenAction,
        }}
      />
    </LiveProvider>
  )
}
