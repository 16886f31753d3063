import type { CreatedInvitation, Invitation, Partners } from '@/lib/data/partner-dto'
import type { FormState } from '@/lib/http/form-state'

type Action<T> = (previous: FormState<T>, form: FormData) => Promise<FormState<T>>

export interface PartnerActions {
  invite: Action<CreatedInvitation>
  withdraw: Action<Invitation>
  change: Action<Partners>
  end: Action<{ team: { slug: string; name: string }; agents: number }>
}
