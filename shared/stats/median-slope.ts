/** The middle value, or the mean of the two in the middle. */
export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b)
  const middle = sorted.length / 2
  return sorted.length % 2 === 0
    ? ((sorted[middle - 1] ?? 0) + (sorted[middle] ?? 0)) / 2
    : (sorted[Math.floor(middle)] ?? 0)
}

/**
 * Median of the slopes between two points (Theil and Sen): a start that far points cannot pull.
 *
 * Among many points every k-th partner is enough: the start need not be efficient.
 */
export function medianSlope(x: readonly number[], y: readonly number[]): number {
  const stride = Math.max(1, Math.floor(x.length / 300))
  const slopes: number[] = []
  for (let i = 0; i < x.length; i += stride) {
    for (let j = i + 1; j < x.length; j += stride) {
      const run = (x[j] ?? 0) - (x[i] ?? 0)
      if (run !== 0) slopes.push(((y[j] ?? 0) - (y[i] ?? 0)) / run)
    }
  }
  return median(slopes)
}
