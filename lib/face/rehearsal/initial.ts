import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import type { MaintenanceWindowDto } from '@/lib/data/rules-dto'
import { withLabels } from './change'
import type { Draft } from './draft'
import type { Prefill } from './prefill'

/** What the form begins with, once what the address names is loaded. */
export function initialDraft(
  { exclude, window: windowId, incident, from }: Prefill,
  windows: readonly MaintenanceWindowDto[],
  rehearsals: readonly RehearsalDto[],
): Draft {
  const before = rehearsals.find(({ id }) => id === from)
  const window = windows.find(({ id }) => id === windowId)
  const base = before?.exclude ?? exclude
  return {
    exclude: window?.label ? withLabels(base, [window.label]) : base,
    note: window?.reason ?? before?.note ?? '',
    incident: incident ?? before?.incident ?? null,
    when: 'now',
    at: '',
  }
}
