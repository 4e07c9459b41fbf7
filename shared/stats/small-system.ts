/** Gaussian elimination of a small symmetric system; null where it is singular. */
export function solveSmallSystem(matrix: readonly (readonly number[])[], right: readonly number[]): number[] | null {
  const rows = matrix.map((row, i) => [...row, right[i] ?? 0])
  const size = right.length
  for (let k = 0; k < size; k++) {
    const pivot = rows.slice(k).reduce((best, row) => (Math.abs(row[k] ?? 0) > Math.abs(best[k] ?? 0) ? row : best))
    if (!(Math.abs(pivot[k] ?? 0) > 1e-280)) return null
    rows.splice(rows.indexOf(pivot), 1)
    rows.splice(k, 0, pivot)
    for (const [i, row] of rows.entries()) {
      if (i === k) continue
      const factor = (row[k] ?? 0) / (pivot[k] ?? 1)
      for (let j = k; j <= size; j++) row[j] = (row[j] ?? 0) - factor * (pivot[j] ?? 0)
    }
  }
  return rows.map((row, k) => (row[size] ?? 0) / (row[k] ?? 1))
}
