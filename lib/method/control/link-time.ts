import type { EvaluateInput } from './estimate'
import { mayRise, paceNow } from './haste'
import { nextLinkTimePerSecond } from './law'
import type { ControlState } from './state'

/** Agents report every interval ±10 %, and are told then. */
export const HEARD_BY_INTERVALS = 1.4

/** ω as it is now. */
export function inForce(
  { linkTimePerSecond, next = null }: ControlState,
  atMs: number,
): Pick<ControlState, 'linkTimePerSecond' | 'next'> {
  return next && atMs >= next.fromAtMs
    ? { linkTimePerSecond: next.linkTimePerSecond, next: null }
    : { linkTimePerSecond, next }
}

/** The next ω, once all agents have heard of it. */
export function nextStep(
  control: ControlState,
  last: ControlState,
  lambda: number | null,
  { now, settings }: EvaluateInput,
): ControlState['next'] {
  const present = paceNow(control, settings)
  const linkTimePerSecond = nextLinkTimePerSecond(control.linkTimePerSecond, lambda, present)
  if (linkTimePerSecond === control.linkTimePerSecond) return null
  if (
    linkTimePerSecond > control.linkTimePerSecond &&
    !mayRise(control, lambda ?? 0, settings.pace, now.atMs)
  )
    return null
  const heardByMs = HEARD_BY_INTERVALS * paceNow(last, settings).intervalMs
  return { linkTimePerSecond, fromAtMs: now.atMs + heardByMs }
}
