import { levenbergMarquardt } from 'ml-levenberg-marquardt'
import { descend, linearise, type Descent } from './nonlinear-gauss-newton.ts'
import type { NonlinearProblem } from './nonlinear-problem.ts'

/** The library gives no verdict and only stops by count, so it runs in short bursts with ours in between. */
const burst = 20
const bursts = 40
const undampedSteps = 50

/** Below this offset the curve is nearly linear in its parameters and an undamped step can be trusted. */
const nearOffset = 0.3

/** Of the damped ways: one bold, one careful. */
const firstDampings = [1e-3, 1]
/** A start is often right in shape and wrong in size. */
const sizes = [1, 0.1, 10]

/**
 * From one start, and where its ways disagree from a tenth and ten times of it, to the lowest optimum that three ways reach.
 *
 * Undamped Gauss-Newton steps can run into a valley without end, and the library keeps steps that made things worse, so
 * each way alone ends now and then in a wrong place. The lowest one that settled wins; only where all three ways of a
 * size settle in one place is the search over.
 */
export function searchFrom(problem: NonlinearProblem, start: readonly number[]): Descent {
  let best: Descent | null = null
  for (const size of sizes) {
    const from = start.map(value => value * size)
    const ends = [descend(problem, from, undampedSteps), ...firstDampings.map(damping => dampedSearch(problem, from, damping))]
    for (const end of ends) best = better(best, end)
    if (best !== null && ends.every(end => end.verdict === 'converged' && isSame(end, ends[0]))) return best
  }
  return best ?? descend(problem, start, undampedSteps)
}

function isSame(one: Descent, other: Descent | undefined): boolean {
  return other !== undefined && Math.abs(one.residualSumOfSquares - other.residualSumOfSquares) <= 1e-6 * other.residualSumOfSquares + Number.MIN_VALUE
}

/** The settled one, then the lower one; between equals the first, so that mirrored optima do not take turns. */
function better(first: Descent | null, second: Descent): Descent {
  if (first === null) return second
  const settled = [first, second].map(descent => descent.verdict === 'converged')
  if (settled[0] !== settled[1]) return settled[0] === true ? first : second
  return second.residualSumOfSquares < first.residualSumOfSquares * (1 - 1e-9) ? second : first
}

function dampedSearch(problem: NonlinearProblem, start: readonly number[], firstDamping: number): Descent {
  let free = start
  let damping = firstDamping
  let stalls = 0
  for (let count = 0; count < bursts; count++) {
    const at = linearise(problem, free)
    if (at !== null && at.relativeOffset < nearOffset) {
      const end = descend(problem, free, undampedSteps)
      if (end.verdict === 'converged') return end
      free = end.free
    }
    const moved = dampedBurst(problem, free, damping)
    if (moved === null) {
      // The library keeps a step that made things worse; with more damping it stays near.
      damping *= 100
      if (damping > 1e9) break
    } else {
      // Thrice next to nothing gained far from an optimum: a valley without end.
      stalls = squares(problem, moved) > (1 - 1e-6) * squares(problem, free) ? stalls + 1 : 0
      if (stalls === 3) break
      damping = Math.max(1e-3, damping / 100)
      free = moved
    }
  }
  return descend(problem, free, undampedSteps)
}

/**
 * One burst, in parameters scaled by the length of their derivative, because the library adds the same damping to each.
 *
 * @returns null where it found nothing lower
 */
function dampedBurst(problem: NonlinearProblem, free: readonly number[], damping: number): readonly number[] | null {
  const rows = problem.jacobian(free)
  const scales = free.map((value, k) => {
    const length = Math.sqrt(rows.reduce((sum, row) => sum + (row[k] ?? 0) ** 2, 0))
    return length > 0 && Number.isFinite(length) ? length : 1 / (Math.abs(value) || 1)
  })
  const unscale = (scaled: readonly number[]): number[] => scaled.map((value, k) => value / (scales[k] ?? 1))
  const before = squares(problem, free)
  try {
    const result = levenbergMarquardt(
      { x: [...problem.x], y: [...problem.y] },
      scaled => problem.curve(unscale(scaled)),
      {
        initialValues: free.map((value, k) => value * (scales[k] ?? 1)),
        weights: problem.rootWeights.map(root => 1 / root),
        damping,
        dampingStepUp: 10,
        dampingStepDown: 10,
        maxIterations: burst,
        errorTolerance: 0,
        minValues: free.map(() => -Infinity),
        maxValues: free.map(() => Infinity),
        jacobianFunction: scaled => {
          const at = problem.derivatives(unscale(scaled))
          return x => at(x).map((partial, k) => partial / (scales[k] ?? 1))
        },
      },
    )
    const moved = unscale(result.parameterValues)
    return squares(problem, moved) < before ? moved : null
  } catch {
    // Its linear solver throws on a matrix that cannot be inverted: a place it cannot leave, not an answer.
    return null
  }
}

function squares(problem: NonlinearProblem, free: readonly number[]): number {
  const sum = problem.residuals(free).reduce((total, residual) => total + residual * residual, 0)
  return Number.isNaN(sum) ? Infinity : sum
}
