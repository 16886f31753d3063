import type { Reading } from '@/lib/data/dto'
import { AppError } from '@/lib/http/app-error'
import type { GreedyInit, GreedyPlan } from '@/lib/method/reinforce'
import { ReckonError } from '@/lib/reckon'
import { getReckoner } from '@/lib/reckon/process'
import type { AdviseInput } from '@/lib/reinforce/advise'
import type { KnownOverlay } from '@/lib/reinforce/known'

/** In the thread beside this process. */
export async function reckonLinks({ graph }: KnownOverlay, init: GreedyInit): Promise<GreedyPlan> {
  try {
    return await getReckoner().reckon('reinforce', { graph, init })
  } catch (error) {
    if (!(error instanceof ReckonError)) throw error
    throw new AppError('unavailable', error.message)
  }
}

/** Of the core, where there is one. */
export const headline = ({ core, lambda2 }: Reading): number | null => core?.lambda2 ?? lambda2

export function ofHeadline(reading: Reading): AdviseInput['reading'] {
  const { lambda3AtMost, level, data, singleCut } = reading
  return { lambda2: headline(reading), lambda3AtMost, level, data, singleCut }
}
