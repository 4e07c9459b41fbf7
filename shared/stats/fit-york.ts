import { chiSquareUpperTail } from './quantiles.ts'
import { StatsError, type Refused } from './types.ts'

/** A straight line where both coordinates are uncertain. */
export interface YorkLine {
  readonly kind: 'fitted'
  readonly intercept: number
  readonly slope: number
  /** From the stated uncertainties, at the adjusted points; not scaled by the MSWD. */
  readonly interceptStandardError: number
  readonly slopeStandardError: number
  readonly covariance: number
  /** Where the line is known best: there intercept and slope are uncorrelated. */
  readonly centre: { readonly x: number; readonly y: number; readonly sumWeights: number; readonly sumSquaresX: number }
  /** Points moved to the line within their uncertainties. */
  readonly adjustedX: readonly number[]
  readonly adjustedY: readonly number[]
  readonly chiSquare: number
  readonly degreesOfFreedom: number
  /** Mean square of weighted deviates: about 1 where the stated uncertainties explain the scatter. */
  readonly mswd: number
  readonly pValue: number
  readonly iterations: number
}

export type YorkOutcome = YorkLine | Refused<'too-few-points' | 'no-spread' | 'not-converged'>

/**
 * Least squares with uncertainties in x and y that may be correlated.
 *
 * The unified equations of York, Evensen, Lopez Martinez & De Basabe Delgado, Am. J. Phys. 72 (2004) 367, written in
 * variances, so that an exact x is allowed.
 *
 * @param data.xStandardUncertainties - zero or above
 * @param data.yStandardUncertainties - above zero
 * @param data.correlations - of the two errors of each point, inside (−1, 1); zero where absent
 * @throws {StatsError} `length-mismatch`, `uncertainty-out-of-range`, `correlation-out-of-range`
 * @example
 * fitYork({ x, y, xStandardUncertainties, yStandardUncertainties })
 */
export function fitYork(data: {
  readonly x: readonly number[]
  readonly y: readonly number[]
  readonly xStandardUncertainties: readonly number[]
  readonly yStandardUncertainties: readonly number[]
  readonly correlations?: readonly number[]
}): YorkOutcome {
  check(data)
  const count = data.x.length
  if (count < 3) return { kind: 'refused', reason: 'too-few-points', detail: `A line with its scatter needs 3 points, got ${count}.` }
  const points = data.x.map((x, i) => {
    const [sx, sy] = [data.xStandardUncertainties[i] ?? 0, data.yStandardUncertainties[i] ?? 1]
    return { x, y: data.y[i] ?? 0, varX: sx * sx, varY: sy * sy, both: (data.correlations?.[i] ?? 0) * sx * sy }
  })
  const meanX = points.reduce((sum, point) => sum + point.x, 0) / count
  const meanY = points.reduce((sum, point) => sum + point.y, 0) / count
  const spread = points.reduce((sum, point) => sum + (point.x - meanX) ** 2, 0)
  if (!(spread > 0)) return { kind: 'refused', reason: 'no-spread', detail: 'All x are equal: no line can be told.' }
  let slope = points.reduce((sum, point) => sum + (point.x - meanX) * (point.y - meanY), 0) / spread

  for (let iterations = 1; iterations <= 500; iterations++) {
    const step = stepFrom(points, slope)
    const settled = Math.abs(step.slope - slope) <= 4e-16 * Math.abs(step.slope) || (iterations > 60 && Math.abs(step.slope - slope) <= 1e-13 * Math.abs(step.slope))
    slope = step.slope
    if (!Number.isFinite(slope)) break
    if (settled) return describe(points, slope, iterations)
  }
  return { kind: 'refused', reason: 'not-converged', detail: 'The slope does not settle: the points do not tell a line within their uncertainties.' }
}

interface Point {
  readonly x: number
  readonly y: number
  readonly varX: number
  readonly varY: number
  readonly both: number
}

function check(data: Parameters<typeof fitYork>[0]): void {
  const { x, y, xStandardUncertainties, yStandardUncertainties, correlations } = data
  if ([y, xStandardUncertainties, yStandardUncertainties, correlations ?? x].some(column => column.length !== x.length)) {
    throw new StatsError('length-mismatch', `x has ${x.length} values; every other list needs as many`)
  }
  if (xStandardUncertainties.some(u => !(u >= 0 && Number.isFinite(u))) || yStandardUncertainties.some(u => !(u > 0 && Number.isFinite(u)))) {
    throw new StatsError('uncertainty-out-of-range', 'standard uncertainties must be finite, above zero for y, not below zero for x')
  }
  if (correlations?.some(r => !(r > -1 && r < 1))) throw new StatsError('correlation-out-of-range', 'each correlation must be inside (-1, 1)')
}

/** One turn of York's iteration: weights and adjusted places from a slope, and the slope that they give. */
function stepFrom(points: readonly Point[], slope: number) {
  const weights = points.map(point => 1 / (point.varY + slope * slope * point.varX - 2 * slope * point.both))
  const sumWeights = weights.reduce((sum, weight) => sum + weight, 0)
  const mean = (part: (point: Point) => number) => points.reduce((sum, point, i) => sum + (weights[i] ?? 0) * part(point), 0) / sumWeights
  const [meanX, meanY] = [mean(point => point.x), mean(point => point.y)]
  const shifts = points.map((point, i) => {
    const [u, v] = [point.x - meanX, point.y - meanY]
    return (weights[i] ?? 0) * (u * point.varY + slope * v * point.varX - (slope * u + v) * point.both)
  })
  let above = 0
  let below = 0
  for (const [i, point] of points.entries()) {
    const share = (weights[i] ?? 0) * (shifts[i] ?? 0)
    above += share * (point.y - meanY)
    below += share * (point.x - meanX)
  }
  return { slope: above / below, weights, sumWeights, meanX, meanY, shifts }
}

function describe(points: readonly Point[], slope: number, iterations: number): YorkLine {
  const { weights, sumWeights, meanX, meanY, shifts } = stepFrom(points, slope)
  const intercept = meanY - slope * meanX
  const adjustedX = shifts.map(shift => meanX + shift)
  const centreX = adjustedX.reduce((sum, x, i) => sum + (weights[i] ?? 0) * x, 0) / sumWeights
  const sumSquaresX = adjustedX.reduce((sum, x, i) => sum + (weights[i] ?? 0) * (x - centreX) ** 2, 0)
  // Around the centre, so that a large offset of x takes no digits.
  const chiSquare = points.reduce((sum, point, i) => sum + (weights[i] ?? 0) * (point.y - meanY - slope * (point.x - meanX)) ** 2, 0)
  const degreesOfFreedom = points.length - 2
  return {
    kind: 'fitted',
    intercept,
    slope,
    interceptStandardError: Math.sqrt(1 / sumWeights + (centreX * centreX) / sumSquaresX),
    slopeStandardError: Math.sqrt(1 / sumSquaresX),
    covariance: -centreX / sumSquaresX,
    centre: { x: centreX, y: meanY + slope * (centreX - meanX), sumWeights, sumSquaresX },
    adjustedX,
    adjustedY: adjustedX.map(x => meanY + slope * (x - meanX)),
    chiSquare,
    degreesOfFreedom,
    mswd: chiSquare / degreesOfFreedom,
    pValue: chiSquareUpperTail(chiSquare, degreesOfFreedom),
    iterations,
  }
}
