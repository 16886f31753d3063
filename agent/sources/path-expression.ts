/**
 * Where something is in JSON: member names joined by dots, `[]` for every element of an array or every member of an
 * object. `peers[].address` is the address of each peer; `[]` alone is each element of the whole. Names with dots or
 * brackets are quoted: `"data.v2"[].host`.
 */
export type PathStep = { member: string } | 'each'

export type PathResult = { ok: true; steps: PathStep[] } | { ok: false; issue: string }

const STEP = /^(?:\[\]|\.?"([^"]+)"|\.?([^.[\]"\s]+))/

export function parsePath(text: string): PathResult {
  const steps: PathStep[] = []
  let rest = text.trim()
  while (rest !== '') {
    const match = STEP.exec(rest)
    const isLate = steps.length > 0
    if (!match || (match[0].startsWith('.') && !isLate)) return refused(text, rest)
    const member = match[1] ?? match[2]
    if (member !== undefined && isLate && !match[0].startsWith('.')) return refused(text, rest)
    steps.push(member === undefined ? 'each' : { member })
    rest = rest.slice(match[0].length)
  }
  return { ok: true, steps }
}

const refused = (text: string, rest: string): PathResult => ({
  ok: false,
  issue: `"${text}" cannot be followed from "${rest}" on: write names joined by dots, and [] for every element.`,
})

/** Everything the steps lead to; null where a step leads nowhere, which is no empty list. */
export function follow(json: unknown, steps: readonly PathStep[]): unknown[] | null {
  let at: unknown[] = [json]
  for (const step of steps) {
    const next: unknown[] = []
    for (const value of at) {
      if (step === 'each') {
        if (typeof value !== 'object' || value === null) return null
        for (const element of Object.values(value)) next.push(element)
      } else {
        if (typeof value !== 'object' || value === null || Array.isArray(value)) return null
        if (!Object.hasOwn(value, step.member)) return null
        next.push(Reflect.get(value, step.member))
      }
    }
    at = next
  }
  return at
}
