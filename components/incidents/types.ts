import type { Incident } from '@/lib/data/warn-dto'
import type { FormState } from '@/lib/http/form-state'

export type IncidentAction = (previous: FormState<Incident>, form: FormData) => Promise<FormState<Incident>>

export interface IncidentActions {
  take: IncidentAction
  handOver: IncidentAction
  note: IncidentAction
  mute: IncidentAction
  unmute: IncidentAction
  resolve: IncidentAction
  reopen: IncidentAction
}
