import { factorCholesky } from '../stats/cholesky.ts'

export interface Mode {
  readonly at: readonly number[]
  /** Square root of the inverse curvature: turns standard normal steps into steps of the posterior's own size. */
  readonly factor: readonly (readonly number[])[]
  /** ln determinant of `factor`. */
  readonly logDeterminant: number
}

/**
 * The largest value of a smooth log density of a few variables, and its curvature there.
 *
 * Nelder & Mead's simplex (Computer Journal 7 (1965) 308): no derivatives, and safe where the density is cut off.
 *
 * @param target - log density; -Infinity where impossible
 * @param scales - typical size of each variable
 */
export function findMode(target: (at: readonly number[]) => number, start: readonly number[], scales: readonly number[]): Mode {
  const size = start.length
  let simplex = [start, ...start.map((_, d) => start.map((value, k) => (k === d ? value + 0.5 * (scales[d] ?? 1) : value)))]
    .map(at => ({ at, value: target(at) }))
  const along = (from: readonly number[], to: readonly number[], share: number) => from.map((value, d) => value + share * ((to[d] ?? 0) - value))
  for (let iteration = 0; iteration < 200; iteration++) {
    simplex.sort((a, b) => b.value - a.value)
    const best = simplex[0]
    const worst = simplex[size]
    const second = simplex[size - 1]
    if (best === undefined || worst === undefined || second === undefined) break
    if (best.value - worst.value < 1e-4) break
    const middle = start.map((_, d) => simplex.slice(0, size).reduce((sum, point) => sum + (point.at[d] ?? 0), 0) / size)
    const tryAt = (share: number) => {
      const at = along(middle, worst.at, share)
      return { at, value: target(at) }
    }
    const reflected = tryAt(-1)
    if (reflected.value > best.value) {
      const expanded = tryAt(-2)
      simplex[size] = expanded.value > reflected.value ? expanded : reflected
    } else if (reflected.value > second.value) simplex[size] = reflected
    else {
      const contracted = tryAt(reflected.value > worst.value ? -0.5 : 0.5)
      if (contracted.value > Math.max(reflected.value, worst.value)) simplex[size] = contracted
      else {
        simplex = simplex.map((point, i) => {
          if (i === 0) return point
          const at = along(best.at, point.at, 0.5)
          return { at, value: target(at) }
        })
      }
    }
  }
  simplex.sort((a, b) => b.value - a.value)
  const at = simplex[0]?.at ?? start
  return { at, ...curvatureFactor(target, at, scales) }
}

/** Inverse curvature by central differences; where it is not a peak the prior's scales serve. */
function curvatureFactor(target: (at: readonly number[]) => number, at: readonly number[], scales: readonly number[]) {
  const size = at.length
  const steps = scales.map(scale => 0.02 * scale)
  const shifted = (moves: readonly (readonly [number, number])[]) =>
    target(at.map((value, d) => moves.reduce((sum, [k, amount]) => (k === d ? sum + amount * (steps[d] ?? 0) : sum), value)))
  const centre = target(at)
  const information = Array.from({ length: size }, (_, i) =>
    Array.from({ length: size }, (__, j) => {
      const scale = (steps[i] ?? 1) * (steps[j] ?? 1)
      if (i === j) return -(shifted([[i, 1]]) - 2 * centre + shifted([[i, -1]])) / scale
      return -(shifted([[i, 1], [j, 1]]) - shifted([[i, 1], [j, -1]]) - shifted([[i, -1], [j, 1]]) + shifted([[i, -1], [j, -1]])) / (4 * scale)
    }))
  const covariance = factorCholesky(information)?.inverse()
  const usable = covariance ?? scales.map((scale, i) => scales.map((_, j) => (i === j ? scale * scale : 0)))
  const factor: number[][] = []
  let logDeterminant = 0
  for (let i = 0; i < size; i++) {
    const row = new Array<number>(size).fill(0)
    for (let j = 0; j <= i; j++) {
      let sum = usable[i]?.[j] ?? 0
      for (let k = 0; k < j; k++) sum -= (row[k] ?? 0) * (i === j ? (row[k] ?? 0) : (factor[j]?.[k] ?? 0))
      row[j] = i === j ? Math.sqrt(Math.max(sum, 1e-12)) : sum / (factor[j]?.[j] ?? 1)
    }
    logDeterminant += Math.log(row[i] ?? 1)
    factor.push(row)
  }
  return { factor, logDeterminant }
}
