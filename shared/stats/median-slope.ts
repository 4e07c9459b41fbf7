import { median } from 'simple-statistics'

export { median }

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
  // All points at one x have no slope.
  return slopes.length === 0 ? 0 : median(slopes)
}
