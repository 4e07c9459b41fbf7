import { Matrix, QrDecomposition } from 'ml-matrix'
import type { NonlinearProblem } from './nonlinear-problem.ts'

/** One linearisation of a nonlinear fit, solved by QR. */
export interface Linearisation {
  readonly residualSumOfSquares: number
  readonly step: readonly number[]
  /** Length of the residuals inside the tangent plane over their length outside it, each by root degrees of freedom. */
  readonly relativeOffset: number
  /** (JᵀWJ)⁻¹ */
  readonly inverseInformation: readonly (readonly number[])[]
}

export interface Descent {
  readonly free: readonly number[]
  readonly residualSumOfSquares: number
  readonly verdict: 'converged' | 'stopped' | 'singular'
  readonly at: Linearisation | null
}

/** Bates & Watts ask for 1e-3; our answers are also compared to the last digit between worker and server. */
export const acceptedOffset = 1e-6

const sumOfSquares = (values: readonly number[]): number => values.reduce((sum, value) => sum + value * value, 0)

/**
 * Linearises a fit at a place and solves for the Gauss-Newton step.
 *
 * Columns are scaled to length one first, so that units do not pass for ill conditioning.
 *
 * @returns null where the parameters cannot be told apart there
 */
export function linearise(problem: NonlinearProblem, free: readonly number[]): Linearisation | null {
  const residuals = problem.residuals(free)
  const rows = problem.jacobian(free)
  const count = free.length
  const lengths = free.map((_, k) => Math.sqrt(rows.reduce((sum, row) => sum + (row[k] ?? 0) ** 2, 0)))
  if (lengths.some(length => !(length > 0) || !Number.isFinite(length))) return null
  const qr = new QrDecomposition(new Matrix(rows.map(row => row.map((value, k) => value / (lengths[k] ?? 1)))))
  const triangle = qr.upperTriangularMatrix
  const inside = qr.orthogonalMatrix.transpose().mmul(Matrix.columnVector(residuals)).to1DArray().slice(0, count)
  const inverse = invertTriangle(triangle)
  if (inverse === null) return null
  const step = inverse.map((row, k) => row.reduce((sum, value, j) => sum + value * (inside[j] ?? 0), 0) / (lengths[k] ?? 1))
  const residualSumOfSquares = sumOfSquares(residuals)
  const degrees = residuals.length - count
  // Data without scatter have no outside to measure by: then residuals of 1e-13 of y, its rounding, are accepted.
  const rounding = (1e-13 / acceptedOffset) * Math.sqrt(problem.y.reduce((sum, y, i) => sum + (y * (problem.rootWeights[i] ?? 1)) ** 2, 0))
  const outside = Math.max(degrees > 0 ? Math.sqrt(Math.max(0, residualSumOfSquares - sumOfSquares(inside)) / degrees) : 0, rounding, Number.MIN_VALUE)
  return {
    residualSumOfSquares,
    step,
    relativeOffset: Math.sqrt(sumOfSquares(inside) / count) / outside,
    inverseInformation: free.map((_, i) => free.map((__, j) => {
      let sum = 0
      for (let k = 0; k < count; k++) sum += (inverse[i]?.[k] ?? 0) * (inverse[j]?.[k] ?? 0)
      return sum / ((lengths[i] ?? 1) * (lengths[j] ?? 1))
    })),
  }
}

/** Null where the triangle is singular to working precision, judged by the size of its inverse. */
function invertTriangle(triangle: Matrix): number[][] | null {
  const size = triangle.columns
  const inverse = Array.from({ length: size }, () => new Array<number>(size).fill(0))
  for (let column = 0; column < size; column++) {
    for (let i = column; i >= 0; i--) {
      let sum = i === column ? 1 : 0
      for (let k = i + 1; k <= column; k++) sum -= triangle.get(i, k) * (inverse[k]?.[column] ?? 0)
      const value = sum / triangle.get(i, i)
      if (!(Math.abs(value) < 1e13)) return null
      const row = inverse[i]
      if (row !== undefined) row[column] = value
    }
  }
  return inverse
}

/**
 * Gauss-Newton steps, halved until the sum of squares falls, and our own verdict at the end.
 *
 * Once within the accepted offset it goes on with full steps while the offset shrinks, which gains the last digits.
 */
export function descend(problem: NonlinearProblem, start: readonly number[], maximumSteps: number): Descent {
  let free = start
  let at = linearise(problem, free)
  for (let count = 0; count < maximumSteps; count++) {
    if (at === null) return { free, residualSumOfSquares: sumOfSquares(problem.residuals(free)), verdict: 'singular', at }
    const polishing = at.relativeOffset <= acceptedOffset
    const next = polishing ? shiftIfCloser(problem, free, at) : shiftIfLower(problem, free, at)
    if (next === null) return { free, residualSumOfSquares: at.residualSumOfSquares, verdict: polishing ? 'converged' : 'stopped', at }
    free = next
    at = linearise(problem, free)
  }
  const verdict = at === null ? 'singular' : at.relativeOffset <= acceptedOffset ? 'converged' : 'stopped'
  return { free, residualSumOfSquares: at?.residualSumOfSquares ?? sumOfSquares(problem.residuals(free)), verdict, at }
}

function shiftIfCloser(problem: NonlinearProblem, free: readonly number[], at: Linearisation): number[] | null {
  const next = free.map((value, k) => value + (at.step[k] ?? 0))
  const there = linearise(problem, next)
  return there !== null && there.relativeOffset < 0.9 * at.relativeOffset ? next : null
}

function shiftIfLower(problem: NonlinearProblem, free: readonly number[], at: Linearisation): number[] | null {
  for (let share = 1; share > 1e-7; share /= 2) {
    const next = free.map((value, k) => value + share * (at.step[k] ?? 0))
    if (sumOfSquares(problem.residuals(next)) < at.residualSumOfSquares) return next
  }
  return null
}
