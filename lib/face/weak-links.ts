import type { OverlayNode, Reading } from '@/lib/data/dto'

/** λ₂ of what the cut is of: the core where nodes hang loose; the last good one while it is withheld. */
export function headlineLambda2({
  core,
  lambda2,
  last,
}: Pick<Reading, 'core' | 'lambda2' | 'last'>): number | null {
  return core?.lambda2 ?? lambda2 ?? last?.lambda2 ?? null
}

/** What the bound on a link is made of: λ₂ of the headline, and whose word is missing. */
export function headlineOf(
  reading: Pick<Reading, 'core' | 'lambda2' | 'last'>,
  nodes: readonly Pick<OverlayNode, 'name' | 'state'>[],
): { lambda2: number | null; unheard: ReadonlySet<string> } {
  const silent = nodes.filter(({ state }) => state === 'unheard')
  return {
    lambda2: headlineLambda2(reading),
    unheard: new Set(silent.map(({ name }) => name)),
  }
}

/** Both ends of a link with what a label says of each. */
export function labelsOfEnds(
  { a, b }: { a: string; b: string },
  nodes: readonly Pick<OverlayNode, 'name' | 'labels' | 'state'>[],
  key: string | null,
): { name: string; label: string | null }[] {
  return [a, b].map((name) => {
    const labels = nodes.find((node) => node.name === name)?.labels ?? {}
    return { name, label: key === null ? null : (labels[key] ?? null) }
  })
}
