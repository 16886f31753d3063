import type { Metadata } from 'next'
import { Incidents } from '@/components/incidents/incidents'
import { ProblemState } from '@/components/ui'
import { listTeams } from '@/lib/data'
import { page } from '@/lib/http'

export const metadata: Metadata = { title: 'Incidents' }

export default async function IncidentsPage() {
  const teams = await page('team.list', listTeams)
  if (!teams.ok) return <ProblemState problem={teams.problem} />
  return <Incidents showTeam={teams.value.length > 1} />
}
