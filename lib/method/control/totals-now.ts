import type { EvaluateInput } from './estimate'
import type { Totals } from './totals'
import { totalsOfReports } from './totals-of-reports'
import { totalsOfRound } from './totals-of-round'

export const totalsNow = ({
  before,
  now,
  settings,
}: Pick<EvaluateInput, 'before' | 'now' | 'settings'>): Totals =>
  now.round
    ? totalsOfRound(now.round.totals, now.round.isNew)
    : totalsOfReports(before, now, settings.pace.intervalMs)
