import { Mark, type MarkShape } from '@/components/ui'
import type { Incident } from '@/lib/data/warn-dto'
import { INCIDENT_STATE_WORDS } from '@/lib/face/incidents'

const SEVERITY_SHAPES: Record<Incident['severity'], MarkShape> = {
  note: 'short',
  warning: 'hollow',
  urgent: 'full',
}

export function SeverityMark({ severity }: { severity: Incident['severity'] }) {
  return <Mark shape={SEVERITY_SHAPES[severity]}>{severity}</Mark>
}

const STATE_SHAPES: Record<Incident['state'], MarkShape> = {
  open: 'dashed',
  held: 'full',
  cleared: 'hollow',
  resolved: 'short',
}

export function IncidentStateMark({ state }: { state: Incident['state'] }) {
  return <Mark shape={STATE_SHAPES[state]}>{INCIDENT_STATE_WORDS[state]}</Mark>
}
