import type { NonlinearJacobian, NonlinearModel } from './nonlinear-types.ts'

/** The problem in its free parameters alone: whatever is held never reaches a solver. */
export interface NonlinearProblem {
  readonly x: readonly number[]
  readonly y: readonly number[]
  readonly rootWeights: readonly number[]
  readonly freeIndexes: readonly number[]
  /** All parameters from the free ones. */
  complete(free: readonly number[]): number[]
  /** Root-weighted y minus curve. */
  residuals(free: readonly number[]): number[]
  /** Root-weighted derivatives of the curve, one row for each point. */
  jacobian(free: readonly number[]): number[][]
  /** The curve and its derivatives at one x, not weighted. */
  curve(free: readonly number[]): (x: number) => number
  derivatives(free: readonly number[]): (x: number) => number[]
}

/** Cube root of the machine precision: the step at which rounding and curvature of a central difference balance. */
const relativeStep = 6.055454452393343e-6

/** Restates a fit for the free parameters; derivatives by central differences where the caller has none. */
export function stateNonlinearProblem(data: {
  readonly x: readonly number[]
  readonly y: readonly number[]
  readonly rootWeights: readonly number[]
  readonly model: NonlinearModel
  readonly jacobian: NonlinearJacobian | undefined
  readonly start: readonly number[]
  readonly held: readonly boolean[]
}): NonlinearProblem {
  const { x, y, rootWeights, model, jacobian, start } = data
  const freeIndexes = start.map((_, index) => index).filter(index => data.held[index] !== true)
  const complete = (free: readonly number[]): number[] => {
    const all = [...start]
    for (const [position, index] of freeIndexes.entries()) all[index] = free[position] ?? 0
    return all
  }
  const curve = (free: readonly number[]) => model(complete(free))
  const byDifference = (free: readonly number[]) => {
    const pairs = freeIndexes.map((index, position) => {
      const size = Math.max(Math.abs(free[position] ?? 0), 1e-3 * Math.abs(start[index] ?? 0)) || 1
      const shifted = (sign: number) => free.map((value, k) => (k === position ? value + sign * relativeStep * size : value))
      const [above, below] = [shifted(1), shifted(-1)]
      // The step that was really taken, after rounding.
      return { high: curve(above), low: curve(below), step: (above[position] ?? 0) - (below[position] ?? 0) }
    })
    return (at: number) => pairs.map(pair => (pair.high(at) - pair.low(at)) / pair.step)
  }
  const byFormula = (formula: NonlinearJacobian) => (free: readonly number[]) => {
    const partials = formula(complete(free))
    return (at: number) => {
      const all = partials(at)
      return freeIndexes.map(index => all[index] ?? 0)
    }
  }
  const derivatives = jacobian === undefined ? byDifference : byFormula(jacobian)
  return {
    x,
    y,
    rootWeights,
    freeIndexes,
    complete,
    curve,
    derivatives,
    residuals(free) {
      const at = curve(free)
      return x.map((value, i) => (rootWeights[i] ?? 1) * ((y[i] ?? 0) - at(value)))
    },
    jacobian(free) {
      const at = derivatives(free)
      return x.map((value, i) => at(value).map(partial => (rootWeights[i] ?? 1) * partial))
    },
  }
}
