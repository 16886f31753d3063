import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import type { FormState } from '@/lib/http/form-state'

export type RehearsalAction = (
  previous: FormState<RehearsalDto>,
  form: FormData,
) => Promise<FormState<RehearsalDto>>

export interface RehearsalActions {
  start: RehearsalAction
  cancel: RehearsalAction
}
