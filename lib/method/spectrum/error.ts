/** An iteration reached its limit before its residual met the bound. Retry with more iterations or a looser tolerance. */
export class NotConvergedError extends Error {
  readonly code = 'not-converged'
  readonly iterations: number
  /** ‖Lv − θv‖₂ of the best unit vector so far, in units of weight. */
  readonly residual: number
  readonly bound: number

  constructor(what: string, data: { iterations: number; residual: number; bound: number }) {
    super(
      `${what}: not converged after ${data.iterations} iterations (residual ${data.residual}, wanted ${data.bound}); ` +
        'allow more iterations or a larger tolerance',
    )
    this.name = 'NotConvergedError'
    this.iterations = data.iterations
    this.residual = data.residual
    this.bound = data.bound
  }
}
