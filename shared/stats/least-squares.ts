import { compensatedSum } from './compensated-sum.ts'
import { factorQr } from './householder-qr.ts'
import { StatsError, type Refused } from './types.ts'

/** A linear least-squares fit with as many columns as the design has. */
export interface LeastSquares {
  readonly kind: 'fitted'
  readonly coefficients: readonly number[]
  readonly standardErrors: readonly number[]
  /** Of the coefficients: s² (X'WX)⁻¹. */
  readonly covariance: readonly (readonly number[])[]
  readonly residuals: readonly number[]
  /** Weighted. */
  readonly residualSumOfSquares: number
  readonly residualStandardDeviation: number
  readonly degreesOfFreedom: number
}

export type LeastSquaresOutcome = LeastSquares | Refused<'rank-deficient' | 'too-few-rows'>

/**
 * Linear least squares by Householder QR with column pivoting, columns scaled to about unit length, and
 * iterative refinement of coefficients and residuals together (Golub & Van Loan, Matrix Computations, ch. 5). Never by the normal equations: those lose twice the digits.
 *
 * @param data.design - one row per observation; a column of ones for an intercept
 * @param data.weights - above zero; equal where absent
 * @throws {StatsError} `length-mismatch`, `weight-out-of-range`
 * @example
 * leastSquares({ design: [[1, 0], [1, 1], [1, 2]], y: [1, 3, 5] }) // coefficients 1 and 2
 */
export function leastSquares(data: {
  readonly design: readonly (readonly number[])[]
  readonly y: readonly number[]
  readonly weights?: readonly number[]
}): LeastSquaresOutcome {
  const { design, y, weights } = data
  const rows = design.length
  const columns = design[0]?.length ?? 0
  if (
    y.length !== rows ||
    (weights !== undefined && weights.length !== rows) ||
    design.some(row => row.length !== columns)
  ) {
    throw new StatsError(
      'length-mismatch',
      `design has ${rows} rows of ${columns}, y ${y.length}, weights ${weights?.length ?? rows}`,
    )
  }
  if (columns === 0 || rows < columns) {
    return {
      kind: 'refused',
      reason: 'too-few-rows',
      detail: `${columns} coefficients need at least as many rows, got ${rows}.`,
    }
  }
  const roots = weights?.map(weight => {
    if (!(weight > 0))
      throw new StatsError('weight-out-of-range', `weights must be above zero, got ${weight}`)
    return Math.sqrt(weight)
  })
  const rootAt = (i: number): number => roots?.[i] ?? 1
  // Powers of two: scaling that rounds would put the refinement right for a design that is not quite the given one.
  const scales = Array.from({ length: columns }, (_, j) => {
    const norm = Math.sqrt(design.reduce((sum, row, i) => sum + ((row[j] ?? 0) * rootAt(i)) ** 2, 0))
    return norm > 0 && Number.isFinite(norm) ? 2 ** Math.round(Math.log2(norm)) : 1
  })
  const scaled = design.map((row, i) => row.map((value, j) => (value * rootAt(i)) / (scales[j] ?? 1)))
  const right = y.map((value, i) => value * rootAt(i))

  const factored = factorQr(scaled)
  if (factored.rank < columns) {
    return {
      kind: 'refused',
      reason: 'rank-deficient',
      detail: 'Some columns are sums of others: not every coefficient can be told.',
    }
  }
  // Residuals are unknowns of the refined system too (Björck, BIT 7 (1967) 257): with large ones, refining the
  // coefficients alone gains nothing.
  let residuals: readonly number[] = right.map(() => 0)
  let solution: readonly number[] = scales.map(() => 0)
  for (let step = 0; step < 4; step++) {
    const rest = right.map((value, i) =>
      compensatedSum([value, -(residuals[i] ?? 0)], scaled[i] ?? [], solution),
    )
    const cross = scales.map((_, j) =>
      compensatedSum(
        [0],
        scaled.map(row => row[j] ?? 0),
        residuals,
      ),
    )
    const change = factored.solve(rest, cross)
    residuals = residuals.map((value, i) => value + (change.residuals[i] ?? 0))
    solution = solution.map((value, j) => value + (change.solution[j] ?? 0))
  }

  const residualSumOfSquares = residuals.reduce((sum, value) => sum + value * value, 0)
  const degreesOfFreedom = rows - columns
  const variance = degreesOfFreedom > 0 ? residualSumOfSquares / degreesOfFreedom : 0
  const unscaled = factored.crossInverse()
  const covariance = unscaled.map((row, i) =>
    row.map((value, j) => (variance * value) / ((scales[i] ?? 1) * (scales[j] ?? 1))),
  )
  return {
    kind: 'fitted',
    coefficients: solution.map((value, j) => value / (scales[j] ?? 1)),
    standardErrors: covariance.map((row, i) => (degreesOfFreedom > 0 ? Math.sqrt(row[i] ?? 0) : Infinity)),
    covariance,
    residuals: residuals.map((value, i) => value / rootAt(i)),
    residualSumOfSquares,
    residualStandardDeviation: Math.sqrt(variance),
    degreesOfFreedom,
  }
}
