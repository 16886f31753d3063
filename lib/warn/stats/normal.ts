/**
 * Distribution function of the standard normal distribution, to 1.5e-7: M. Abramowitz and I. A. Stegun, Handbook of
 * Mathematical Functions (1964), formula 7.1.26 for the error function.
 */
export function normalCdf(z: number): number {
  const x = Math.abs(z) / Math.SQRT2
  const t = 1 / (1 + 0.3275911 * x)
  const poly =
    t * (0.254829592 + t * (-0.284496736 + t * (1.421413741 + t * (-1.453152027 + t * 1.061405429))))
  const erf = 1 - poly * Math.exp(-x * x)
  return z >= 0 ? (1 + erf) / 2 : (1 - erf) / 2
}
