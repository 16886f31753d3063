/**
 * Standard normal distribution function, within 1.2e-7 relative in the lower tail: erfc by the Chebyshev fit of W. H. Press et al.,
 * Numerical Recipes, 2nd ed. 1992, §6.2 (coefficients from memory, held against known quantiles by a test).
 */
export function normalCdf(z: number): number {
  const x = Math.abs(z) / Math.SQRT2
  const t = 1 / (1 + x / 2)
  const fit = ERFC.reduceRight((sum, coefficient) => sum * t + coefficient, 0)
  const tail = (t * Math.exp(-x * x + fit)) / 2
  return z < 0 ? tail : 1 - tail
}

const ERFC = [
  -1.26551223, 1.00002368, 0.37409196, 0.09678418, -0.18628806, 0.27886807, -1.13520398, 1.48851587,
  -0.82215223, 0.17087277,
]
