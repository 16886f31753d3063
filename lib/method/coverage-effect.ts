/** Where readings stood in 9 of 10 cases, as multiples of the true value. */
export interface EffectRange {
  low: number
  high: number
}

export interface EffectRow extends EffectRange {
  /** Of agents, or of neighbours, that are missing. */
  share: number
}

/**
 * Fresh reading over the exact λ₂ (of the core where loose ends are told apart) while the same agents stay unheard: 5th and 95th
 * percentile, the outermost over four ways of choosing them: at random, neighbouring, at one side of the weak cut, and those
 * that hold most of that cut, which alone bring the 5th percentile below 0.7. The last row is of as many as may be unheard before the
 * reading is withheld; where they held the cut a third of those was withheld already, hence no lower than the row before.
 * Measured by `npm run bench -- coverage --seeds 4`: 12 overlays of 36 to 100 nodes (clusters in pairs, rows and rings, regular,
 * torus, heavy tail, hub, tree and mesh with loose ends), simulated at steady pace, 48 to 96 cases for each share and way.
 */
export const UNHEARD_EFFECT: readonly EffectRow[] = [
  { share: 0.03, low: 0.72, high: 1.06 },
  { share: 0.06, low: 0.6, high: 1.11 },
  { share: 0.1, low: 0.49, high: 1.13 },
  { share: 0.15, low: 0.6, high: 1.16 },
]

/**
 * Exact λ₂ of the part that has agents over that of the whole, nodes without one spread at random: 5th and 95th percentile, by the
 * share of nodes without, which is about that of neighbours without. Same command and overlays, 20 seeds, 1,440 cases a share. 0: the
 * part falls apart.
 */
export const WITHOUT_AGENT_EFFECT: readonly EffectRow[] = [
  { share: 0.02, low: 0.75, high: 1.04 },
  { share: 0.05, low: 0.61, high: 1.06 },
  { share: 0.1, low: 0.34, high: 1.08 },
  { share: 0.2, low: 0, high: 0.97 },
  { share: 0.3, low: 0, high: 0.83 },
  { share: 0.5, low: 0, high: 0.57 },
]

/**
 * With half of the nodes without an agent, as many as possible of them at one side of the weak cut, one in 20 parts read over so many
 * times the whole. Few neighbours lack an agent then, and the cut is not seen at all. Same command, 960 cases.
 */
export const SIDE_WITHOUT_TIMES = 15.2

/** @param share of the joined agents, from 0 to 1; null where none is unheard, or more than a reading is given for */
export function unheardEffect(share: number): EffectRange | null {
  return outerOf(UNHEARD_EFFECT, share)
}

/** @param share of the agents' neighbours that have no agent, from 0 to 1; null where there are none, or more than was measured */
export function withoutAgentEffect(share: number): EffectRange | null {
  return outerOf(WITHOUT_AGENT_EFFECT, share)
}

/** Between two rows the outer of both: what lies between was not measured. */
function outerOf(rows: readonly EffectRow[], share: number): EffectRange | null {
  const above = rows.find((row) => share <= row.share)
  if (!(share > 0) || !above) return null
  const below = rows.findLast((row) => row.share <= share) ?? { low: 1, high: 1 }
  return { low: Math.min(below.low, above.low), high: Math.max(below.high, above.high) }
}
