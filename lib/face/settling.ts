const STEP_SECONDS = 5

/** To the next five seconds up, from two minutes on to the minute: nobody can tell more exactly. */
export function about(ms: number): string {
  const seconds = Math.max(STEP_SECONDS, Math.ceil(ms / 1000 / STEP_SECONDS) * STEP_SECONDS)
  return seconds < 120 ? `${seconds} s` : `${Math.ceil(seconds / 60)} min`
}

/** "Settling: about 40 s more." */
export function settlingText(settlesInMs: number | null | undefined): string {
  return settlesInMs ? `Settling: about ${about(settlesInMs)} more.` : 'Settling.'
}

/** How long this overlay takes to answer; null where it is not known. */
export function answerText(answersInMs: number | null | undefined): string | null {
  if (!answersInMs) return null
  return `A change of links takes about ${about(answersInMs)} to show here as a settled reading.`
}
