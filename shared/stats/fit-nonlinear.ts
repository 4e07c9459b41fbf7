import { searchFrom } from './nonlinear-descent.ts'
import type { Descent } from './nonlinear-gauss-newton.ts'
import { stateNonlinearProblem, type NonlinearProblem } from './nonlinear-problem.ts'
import type { NonlinearJacobian, NonlinearModel, NonlinearOutcome, NonlinearRefusal } from './nonlinear-types.ts'
import { StatsError } from './types.ts'

export interface NonlinearOptions {
  readonly x: readonly number[]
  readonly y: readonly number[]
  /** Above zero, one for each point, as 1/variance; equal where absent. */
  readonly weights?: readonly number[]
  readonly model: NonlinearModel
  /** Central differences where absent. */
  readonly jacobian?: NonlinearJacobian
  /** Complete parameter vectors to start from; the lowest optimum of all wins. */
  readonly starts: readonly (readonly number[])[]
  /** True where a parameter stays at its start value, in any position. */
  readonly held?: readonly boolean[]
  /**
   * What repeated values leave over about their means, where y holds the means and weights their summed weights: the same
   * fit as of all values, in less time.
   */
  readonly pureError?: { readonly sumOfSquares: number; readonly degreesOfFreedom: number }
}

/**
 * Weighted nonlinear least squares with a verdict.
 *
 * Bursts of ml-levenberg-marquardt, then Gauss-Newton steps by QR that judge convergence by the relative offset of
 * Bates & Watts (Nonlinear Regression Analysis and Its Applications, 1988, ch. 2) and give the covariance
 * (JᵀWJ)⁻¹ s². A fit that stops anywhere else is refused; so is one where another start has been seen lower.
 *
 * @throws {StatsError} `length-mismatch`, `weight-out-of-range`, `no-start`, `nothing-free`
 * @example
 * const outcome = fitNonlinear({ x, y, model: ([a = 0, b = 0]) => at => a * Math.exp(b * at), starts: [[1, 0.1]] })
 * if (outcome.kind === 'fitted') outcome.parameters
 */
export function fitNonlinear(options: NonlinearOptions): NonlinearOutcome {
  checkOptions(options)
  const { x, y, weights, starts, pureError = { sumOfSquares: 0, degreesOfFreedom: 0 } } = options
  const first = starts[0] ?? []
  const held = options.held ?? first.map(() => false)
  const freeCount = held.filter(isHeld => !isHeld).length
  if (x.length < freeCount) {
    return refuse('too-few-points', `${x.length} points cannot tell ${freeCount} parameters. Add points or hold a parameter.`)
  }
  const rootWeights = x.map((_, i) => Math.sqrt(weights?.[i] ?? 1))
  let best: { problem: NonlinearProblem; descent: Descent; start: readonly number[] } | null = null
  let lowestElsewhere = Infinity
  let singular = false
  for (const start of starts) {
    const problem = stateNonlinearProblem({ x, y, rootWeights, model: options.model, jacobian: options.jacobian, start, held })
    const descent = searchFrom(problem, problem.freeIndexes.map(index => start[index] ?? 0))
    if (descent.verdict !== 'converged' || runsAway(problem, descent, start, pureError)) {
      singular ||= descent.verdict !== 'stopped'
      lowestElsewhere = Math.min(lowestElsewhere, Number.isNaN(descent.residualSumOfSquares) ? Infinity : descent.residualSumOfSquares)
    } else if (best === null || descent.residualSumOfSquares < best.descent.residualSumOfSquares) {
      best = { problem, descent, start }
    }
  }
  if (best === null) {
    return singular
      ? refuse('not-identified', 'These points cannot tell the parameters of this curve apart.')
      : refuse('not-converged', 'No start led to an optimum. The curve may not suit these points.')
  }
  if (lowestElsewhere < best.descent.residualSumOfSquares * (1 - 1e-8)) {
    return refuse('not-converged', 'One start reached a closer fit without settling, so the settled one is not the best.')
  }
  return describe(best.problem, best.descent, pureError)
}

type PureError = NonNullable<NonlinearOptions['pureError']>

const refuse = (reason: NonlinearRefusal['reason'], detail: string): NonlinearRefusal => ({ kind: 'refused', reason, detail })

function checkOptions({ x, y, weights, starts, held }: NonlinearOptions): void {
  if (y.length !== x.length || (weights !== undefined && weights.length !== x.length)) {
    throw new StatsError('length-mismatch', `x has ${x.length} values, y ${y.length}, weights ${weights?.length ?? x.length}`)
  }
  if (weights?.some(weight => !(weight > 0 && Number.isFinite(weight)))) {
    throw new StatsError('weight-out-of-range', 'each weight must be a finite number above zero')
  }
  const length = starts[0]?.length ?? 0
  if (length === 0 || starts.some(start => start.some(value => !Number.isFinite(value)))) {
    throw new StatsError('no-start', 'give at least one start with a finite value for each parameter')
  }
  if (starts.some(start => start.length !== length) || (held !== undefined && held.length !== length)) {
    throw new StatsError('length-mismatch', `starts and held need one entry for each of the ${length} parameters`)
  }
  if (held?.every(isHeld => isHeld)) throw new StatsError('nothing-free', 'at least one parameter must be free')
}

/** A parameter whose uncertainty is a million times its size has left the place where the curve depends on it. */
function runsAway(problem: NonlinearProblem, descent: Descent, start: readonly number[], pureError: PureError): boolean {
  const { at, free } = descent
  if (at === null) return true
  const degrees = problem.x.length - free.length + pureError.degreesOfFreedom
  const spread = degrees > 0 ? Math.sqrt((at.residualSumOfSquares + pureError.sumOfSquares) / degrees) : 0
  return free.some((value, k) => {
    const size = Math.max(Math.abs(value), Math.abs(start[problem.freeIndexes[k] ?? 0] ?? 0))
    return spread * Math.sqrt(at.inverseInformation[k]?.[k] ?? Infinity) > 1e6 * size
  })
}

function describe(problem: NonlinearProblem, descent: Descent, pureError: PureError): NonlinearOutcome {
  const { at, free } = descent
  if (at === null) return refuse('not-identified', 'These points cannot tell the parameters of this curve apart.')
  const parameters = problem.complete(free)
  const degreesOfFreedom = problem.x.length - free.length + pureError.degreesOfFreedom
  const residualSumOfSquares = at.residualSumOfSquares + pureError.sumOfSquares
  const variance = degreesOfFreedom > 0 ? residualSumOfSquares / degreesOfFreedom : 0
  const covariance = parameters.map(() => parameters.map(() => 0))
  for (const [i, rowIndex] of problem.freeIndexes.entries()) {
    const row = covariance[rowIndex] ?? []
    for (const [j, columnIndex] of problem.freeIndexes.entries()) row[columnIndex] = variance * (at.inverseInformation[i]?.[j] ?? 0)
  }
  const curve = problem.curve(free)
  return {
    kind: 'fitted',
    parameters,
    standardErrors: parameters.map((_, k) => {
      if (!problem.freeIndexes.includes(k)) return 0
      return degreesOfFreedom > 0 ? Math.sqrt(covariance[k]?.[k] ?? 0) : Infinity
    }),
    covariance,
    residuals: problem.x.map((value, i) => (problem.y[i] ?? 0) - curve(value)),
    residualSumOfSquares,
    degreesOfFreedom,
    residualStandardDeviation: Math.sqrt(variance),
    relativeOffset: at.relativeOffset,
  }
}
