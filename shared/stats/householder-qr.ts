/** A matrix of full column rank as Q R with its columns reordered. */
export interface HouseholderQr {
  readonly rank: number
  /** Solves r + X b = rest, X'r = cross for the residuals r and the solution b. */
  solve(rest: readonly number[], cross: readonly number[]): { residuals: number[]; solution: number[] }
  /** (X'X)⁻¹ */
  crossInverse(): number[][]
}

/**
 * Householder QR with column pivoting (Golub & Van Loan, Matrix Computations, ch. 5).
 *
 * @param matrix - row by row, at least as many rows as columns, columns of about unit length
 */
export function factorQr(matrix: readonly (readonly number[])[]): HouseholderQr {
  const rows = matrix.length
  const columns = matrix[0]?.length ?? 0
  // Column by column, so that the inner loops run over plain arrays.
  const a = Array.from({ length: columns }, (_, j) => Float64Array.from(matrix, row => row[j] ?? 0))
  const pivots = Array.from({ length: columns }, (_, j) => j)
  const reflectors: Float64Array[] = []
  const diagonal: number[] = []
  const tail = (column: Float64Array, from: number): number => {
    let sum = 0
    for (let i = from; i < rows; i++) sum += (column[i] ?? 0) ** 2
    return Math.sqrt(sum)
  }
  const reflect = (v: Float64Array, column: Float64Array, from: number): void => {
    let product = 0
    for (let i = from; i < rows; i++) product += (v[i] ?? 0) * (column[i] ?? 0)
    for (let i = from; i < rows; i++) column[i] = (column[i] ?? 0) - 2 * product * (v[i] ?? 0)
  }
  for (let k = 0; k < columns; k++) {
    let best = k
    for (let j = k + 1; j < columns; j++) if (tail(column(j), k) > tail(column(best), k)) best = j
    swap(a, k, best)
    swap(pivots, k, best)
    const pivot = column(k)
    const norm = tail(pivot, k)
    const v = new Float64Array(rows)
    const head = (pivot[k] ?? 0) > 0 ? -norm : norm
    for (let i = k; i < rows; i++) v[i] = pivot[i] ?? 0
    v[k] = (v[k] ?? 0) - head
    const length = tail(v, k)
    if (length > 0) for (let i = k; i < rows; i++) v[i] = (v[i] ?? 0) / length
    for (let j = k + 1; j < columns; j++) reflect(v, column(j), k)
    diagonal.push(head)
    reflectors.push(v)
  }
  function column(j: number): Float64Array {
    return a[j] ?? new Float64Array(rows)
  }
  /** Entry of R above its diagonal. */
  const r = (i: number, j: number): number => (i === j ? (diagonal[i] ?? 0) : (a[j]?.[i] ?? 0))
  // Certified polynomials have condition numbers up to 1e15 after scaling, so the limit stands right at the noise.
  const limit = Math.abs(diagonal[0] ?? 0) * columns * 2 ** -53
  const rank = diagonal.filter(value => Math.abs(value) > limit).length
  const backSolve = (z: ArrayLike<number>): number[] => {
    const solution = new Array<number>(columns).fill(0)
    for (let i = columns - 1; i >= 0; i--) {
      let sum = z[i] ?? 0
      for (let j = i + 1; j < columns; j++) sum -= r(i, j) * (solution[j] ?? 0)
      solution[i] = sum / (diagonal[i] ?? 1)
    }
    return solution
  }
  const unpivot = (solution: readonly number[]): number[] => {
    const ordered = new Array<number>(columns).fill(0)
    for (const [k, j] of pivots.entries()) ordered[j] = solution[k] ?? 0
    return ordered
  }
  return {
    rank,
    solve(rest, cross) {
      const z = Float64Array.from(rest)
      for (const [k, v] of reflectors.entries()) reflect(v, z, k)
      const head: number[] = []
      for (let i = 0; i < columns; i++) {
        let sum = cross[pivots[i] ?? 0] ?? 0
        for (let k = 0; k < i; k++) sum -= r(k, i) * (head[k] ?? 0)
        head.push(sum / (diagonal[i] ?? 1))
      }
      const solution = unpivot(backSolve(head.map((value, i) => (z[i] ?? 0) - value)))
      for (const [i, value] of head.entries()) z[i] = value
      for (let k = reflectors.length - 1; k >= 0; k--) reflect(reflectors[k] ?? z, z, k)
      return { residuals: [...z], solution }
    },
    crossInverse() {
      // Columns of R⁻¹; their outer products add up to (R'R)⁻¹.
      const inverse = Array.from({ length: columns }, (_, k) =>
        unpivot(backSolve(Array.from({ length: columns }, (__, i) => (i === k ? 1 : 0)))),
      )
      return Array.from({ length: columns }, (_, i) =>
        Array.from({ length: columns }, (__, j) =>
          inverse.reduce((sum, col) => sum + (col[i] ?? 0) * (col[j] ?? 0), 0),
        ),
      )
    },
  }
}

function swap<T>(values: T[], i: number, j: number): void {
  const [a, b] = [values[i], values[j]]
  if (i === j || a === undefined || b === undefined) return
  values[i] = b
  values[j] = a
}
