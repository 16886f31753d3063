import { SURE } from './births'

/**
 * Declared z̄ against the walkers that arrive. A neighbour with difference d = x − y lets w·h·d of it (X less Y) leave over a
 * link of weight w in h of link time, whatever else happens to it; so over any stretch of time the net arrivals N have mean
 * w·ω·∫d dt, and given d their variance is at most the number V of all walkers that came (each leaves or stays: a sum of
 * independent Bernoulli draws). d itself is not declared, but its exponential average z̄ is, and averages can be undone:
 * d = z̄₀ + (z̄₁ − z̄₀)/(1 − exp(−dt/τ)).
 *
 * Per block of time, with D the declared integral of each colony: S = Σ (N − D)²/V is χ² with one degree of freedom per colony
 * while all is well, and δ² = (Σ (N − D)² − ΣV)/Σ max(N², D²) says how far off the whole is.
 */

/** A block is judged once so long has been walked towards here. */
export const BLOCK_INTERVALS = 5
export const BLOCK_AT_LEAST_MS = 5_000
/**
 * Frames come with gaps and delays, so D is not quite of the same time as N. Where populations swing and both types stand at a node,
 * that shifts D − N by some percent of all that came, which near a weak cut's middle is more than N itself (the root of a tree
 * on a lossy link, at a third of its rate, was 0.6–0.8 off three times in a row): this share of V counts as noise.
 */
export const TIMING_SHARE = 0.1
/** A bad block needs both: a χ² `SURE` standard deviations out, and this share of the size off. */
export const MOST_OFF = 0.5
/** So many bad blocks in a row are a fault. */
export const BAD_BLOCKS = 3
/**
 * Declared over found, averaged over so many blocks, may differ from 1 by this factor. On clean links it stays within 0.98–1.03; on
 * one that loses every fifth frame to a neighbour at a third of its rate, the root of a tree, it once came to 1.4: the ends do
 * not hold the link to be live at quite the same times.
 */
export const LONG_BLOCKS = 24
export const MOST_LASTING = 1.75
/** Younger colonies move too much from one order to the next. */
export const LEAST_AGE_INTERVALS = 4

interface ColonyArrivals {
  seeding: number
  mean: number
  net: number
  declared: number
  total: number
}

export interface HeardColony {
  colony: number
  seeding: number
  /** What arrived with this frame. */
  x: number
  y: number
  /** z̄ as declared in it. */
  mean: number
  /** τ: over how long the sender averages. */
  windowMs: number
  /** False while either end refuses the colony, or it stands still or is too young. */
  counts: boolean
}

export interface Step {
  /** Since the last frame; 0 for one that was overtaken. */
  elapsedMs: number
  /** ω by the orders the sender follows, and the agreed weight; either may be 0. */
  linkTimePerSecond: number
  /** ω of a colony, where some have their own. Left out: that of all. */
  of?: (colony: number) => number
  weight: number
  blockMs: number
}

export class ArrivalAudit {
  private readonly colonies = new Map<number, ColonyArrivals>()
  private walkedMs = 0
  private badBlocks = 0
  private blocks = 0
  private crossed = 0
  private squared = 0
  /** Of the last block judged: for tests and status. */
  last: { deviation: number; surety: number; ratio: number } | null = null

  /** Declared over found of late; null while too little was heard. */
  longRatio: number | null = null

  /** @returns declared over found where that is a fault */
  note(heard: readonly HeardColony[], step: Step): number | null {
    const { linkTimePerSecond, of = () => linkTimePerSecond, weight } = step
    for (const part of heard) this.noteColony(part, step.elapsedMs, of(part.colony) * weight)
    if (linkTimePerSecond * weight > 0) this.walkedMs += step.elapsedMs
    if (this.walkedMs < step.blockMs) return null
    this.walkedMs = 0
    return this.judge()
  }

  private noteColony(part: HeardColony, elapsedMs: number, walked: number): void {
    const known = this.colonies.get(part.colony)
    if (!part.counts) {
      this.colonies.delete(part.colony)
      return
    }
    if (known?.seeding !== part.seeding) {
      this.colonies.set(part.colony, {
        seeding: part.seeding,
        mean: part.mean,
        net: 0,
        declared: 0,
        total: 0,
      })
      return
    }
    known.net += part.x - part.y
    known.total += part.x + part.y
    if (elapsedMs <= 0) return
    const share = -Math.expm1(-elapsedMs / part.windowMs)
    const difference = known.mean + (part.mean - known.mean) / share
    known.declared += (walked * elapsedMs * difference) / 1000
    known.mean = part.mean
  }

  private judge(): number | null {
    let chiSquare = 0
    let off = 0
    let noise = 0
    let size = 0
    let crossed = 0
    let squared = 0
    let freedom = 0
    for (const colony of this.colonies.values()) {
      const { net, declared, total } = colony
      colony.net = 0
      colony.declared = 0
      colony.total = 0
      const came = Math.max(total, Math.abs(declared))
      if (came < 1) continue
      const variance = came + (TIMING_SHARE * total) ** 2
      freedom += 1
      chiSquare += (net - declared) ** 2 / variance
      off += (net - declared) ** 2
      noise += variance
      size += Math.max(net ** 2, declared ** 2)
      crossed += (net * declared) / variance
      squared += declared ** 2 / variance
    }
    if (freedom === 0 || size === 0) return null
    const deviation = Math.sqrt(Math.max(0, off - noise) / size)
    const surety = deviationsOut(chiSquare, freedom)
    const ratio = crossed === 0 ? Number.POSITIVE_INFINITY : squared / crossed
    this.last = { deviation, surety, ratio }
    this.badBlocks = surety > SURE && deviation > MOST_OFF ? this.badBlocks + 1 : 0
    if (this.badBlocks >= BAD_BLOCKS) return ratio
    return this.judgeLong(crossed, squared)
  }

  /** A small lie shows in the long run: found = declared / ratio, by least squares; D has hardly any noise, so ΣD²/V is how sure that is. */
  private judgeLong(crossed: number, squared: number): number | null {
    this.blocks += 1
    const forget = 1 - 1 / LONG_BLOCKS
    this.crossed = forget * this.crossed + crossed
    this.squared = forget * this.squared + squared
    if (this.blocks < LONG_BLOCKS || this.squared <= 0 || this.crossed === 0) return null
    const ratio = this.squared / this.crossed
    this.longRatio = ratio
    const sure = Math.abs(this.crossed / this.squared - 1) * Math.sqrt(this.squared) > SURE
    return sure && (ratio > MOST_LASTING || ratio < 1 / MOST_LASTING) ? ratio : null
  }
}

/** A χ² value as standard deviations of a normal: E. B. Wilson and M. M. Hilferty, PNAS 17, 1931. */
export function deviationsOut(chiSquare: number, freedom: number): number {
  const spread = 2 / (9 * freedom)
  return (Math.cbrt(chiSquare / freedom) - 1 + spread) / Math.sqrt(spread)
}
