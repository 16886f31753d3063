import type { Disclosure } from '@/lib/method/orders'
import type { Report } from '@/lib/method/report'

/**
 * What the overlay does not disclose is not stored, even where an agent on old orders, or of an older version, still says it. One that
 * cannot mask its sums is known to live, and no more: it takes no part in the reading until it is upgraded.
 */
export function disclosed(report: Report, disclosure: Disclosure): Report {
  if (disclosure === 'named') return report
  const { complaints: _complaints, node, sums, ...rest } = report
  const isClear = sums.colonies.length > 0 || sums.linkEnds > 0
  const bare = isClear ? { degree: 0, weightedDegree: 0, linksKnown: 0, value: null } : {}
  const { health } = node
  return {
    ...rest,
    sums: {
      ...{ attached: sums.attached, colonies: [], energies: [], moments: [] },
      ...{ linkEnds: 0, linkEndWeight: 0, sweep: null },
    },
    node: {
      ...node,
      ...bare,
      ...(disclosure === 'sealed' && { links: [] }),
      ...(health && {
        health: { ...health, withoutAgent: 0, weakestWeight: null, meanWeight: null, refused: 0 },
      }),
    },
  }
}
