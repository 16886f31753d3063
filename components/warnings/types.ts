import type { MaintenanceWindowDto, WarningRuleDto } from '@/lib/data/rules-dto'
import type { FormState } from '@/lib/http/form-state'

type Action<T> = (previous: FormState<T>, form: FormData) => Promise<FormState<T>>

export interface WarningActions {
  add: Action<WarningRuleDto>
  change: Action<WarningRuleDto>
  remove: Action<void>
  createWindow: Action<MaintenanceWindowDto>
  endWindow: Action<MaintenanceWindowDto>
}
