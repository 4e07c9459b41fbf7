/** A symmetric positive definite matrix factored as L Lᵀ; only for the few columns of a response curve. */
export interface Cholesky {
  readonly logDeterminant: number
  solve(rightSide: readonly number[]): number[]
  inverse(): number[][]
}

/**
 * Factors a small symmetric matrix.
 *
 * @returns null where the matrix is not positive definite to working precision
 * @example
 * factorCholesky([[4, 2], [2, 3]])?.solve([2, 1]) // => [0.5, 0]
 */
export function factorCholesky(matrix: readonly (readonly number[])[]): Cholesky | null {
  const size = matrix.length
  const lower: number[][] = []
  let logDeterminant = 0
  for (let i = 0; i < size; i++) {
    const row: number[] = []
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i]?.[j] ?? 0
      for (let k = 0; k < j; k++) sum -= (row[k] ?? 0) * (j === i ? (row[k] ?? 0) : (lower[j]?.[k] ?? 0))
      if (j === i) {
        if (!(sum > 0) || !Number.isFinite(sum)) return null
        row.push(Math.sqrt(sum))
        logDeterminant += Math.log(sum)
      } else {
        row.push(sum / (lower[j]?.[j] ?? 1))
      }
    }
    lower.push(row)
  }
  const at = (i: number, j: number): number => lower[i]?.[j] ?? 0
  const solve = (rightSide: readonly number[]): number[] => {
    const solution = [...rightSide]
    for (let i = 0; i < size; i++) {
      let sum = solution[i] ?? 0
      for (let k = 0; k < i; k++) sum -= at(i, k) * (solution[k] ?? 0)
      solution[i] = sum / at(i, i)
    }
    for (let i = size - 1; i >= 0; i--) {
      let sum = solution[i] ?? 0
      for (let k = i + 1; k < size; k++) sum -= at(k, i) * (solution[k] ?? 0)
      solution[i] = sum / at(i, i)
    }
    return solution
  }
  const inverse = () => matrix.map((_, j) => solve(matrix.map((__, i) => (i === j ? 1 : 0))))
  return { logDeterminant, solve, inverse }
}
