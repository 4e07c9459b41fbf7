import { StatsError } from './types.ts'

/** A straight line by (weighted) least squares, solved around the weighted means. */
export interface StraightLine {
  readonly slope: number
  readonly intercept: number
  readonly meanX: number
  readonly meanY: number
  /** Weighted sum of squares of x about its mean. */
  readonly sumSquaresX: number
  readonly sumWeights: number
  readonly residuals: readonly number[]
  readonly leverages: readonly number[]
  /** Weighted sum of squared residuals. */
  readonly residualSumOfSquares: number
  /** Weighted sum of squares of y about its mean. */
  readonly totalSumOfSquares: number
  readonly degreesOfFreedom: number
}

/**
 * Fits y = intercept + slope x.
 *
 * Centring before solving keeps all digits where x has a large offset, and makes slope and centre uncorrelated.
 *
 * @param data.weights - above zero, one for each point; equal where absent
 * @throws {StatsError} `length-mismatch`, `too-few-points` (needs 2), `weight-out-of-range`, `no-spread` when all x are equal
 * @example
 * fitStraightLine({ x: [0, 1, 2], y: [1, 3, 5] }).slope // => 2
 */
export function fitStraightLine(data: {
  readonly x: readonly number[]
  readonly y: readonly number[]
  readonly weights?: readonly number[]
}): StraightLine {
  const { x, y, weights } = data
  const count = x.length
  if (y.length !== count || (weights !== undefined && weights.length !== count)) {
    throw new StatsError('length-mismatch', `x has ${count} values, y ${y.length}, weights ${weights?.length ?? count}`)
  }
  if (count < 2) throw new StatsError('too-few-points', `a line needs at least 2 points, got ${count}`)
  const weightAt = (i: number): number => (weights === undefined ? 1 : (weights[i] ?? 0))
  let sumWeights = 0
  let sumX = 0
  let sumY = 0
  for (let i = 0; i < count; i++) {
    const weight = weightAt(i)
    if (!(weight > 0)) throw new StatsError('weight-out-of-range', `weights must be above zero, got ${weight}`)
    sumWeights += weight
    sumX += weight * (x[i] ?? 0)
    sumY += weight * (y[i] ?? 0)
  }
  const meanX = sumX / sumWeights
  const meanY = sumY / sumWeights
  let sumSquaresX = 0
  let sumProducts = 0
  let totalSumOfSquares = 0
  for (let i = 0; i < count; i++) {
    const weight = weightAt(i)
    const dx = (x[i] ?? 0) - meanX
    const dy = (y[i] ?? 0) - meanY
    sumSquaresX += weight * dx * dx
    sumProducts += weight * dx * dy
    totalSumOfSquares += weight * dy * dy
  }
  if (!(sumSquaresX > 0)) throw new StatsError('no-spread', 'all x are equal: no line can be told')
  const slope = sumProducts / sumSquaresX
  const residuals: number[] = []
  const leverages: number[] = []
  let residualSumOfSquares = 0
  for (let i = 0; i < count; i++) {
    const weight = weightAt(i)
    const dx = (x[i] ?? 0) - meanX
    const residual = (y[i] ?? 0) - meanY - slope * dx
    residuals.push(residual)
    leverages.push(weight * (1 / sumWeights + (dx * dx) / sumSquaresX))
    residualSumOfSquares += weight * residual * residual
  }
  return {
    slope,
    intercept: meanY - slope * meanX,
    meanX,
    meanY,
    sumSquaresX,
    sumWeights,
    residuals,
    leverages,
    residualSumOfSquares,
    totalSumOfSquares,
    degreesOfFreedom: count - 2,
  }
}
