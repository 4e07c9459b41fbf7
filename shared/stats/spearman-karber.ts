import { isotonicRegression } from './isotonic-regression.ts'

export type SpearmanKarberOutcome =
  | {
      readonly kind: 'fitted'
      /** Mean of the tolerance distribution on the scale of `x`. */
      readonly mean: number
      /** Only without trimming: root of the sum of p(1 - p)/(n - 1) times the squared half-distance of the neighbours. */
      readonly standardError: number | null
      /** The proportions used, made monotone. */
      readonly shares: readonly number[]
    }
  | { readonly kind: 'refused'; readonly reason: 'too-few-levels' | 'not-spanning'; readonly detail: string }

function interpolate(x: readonly number[], shares: readonly number[], share: number): number {
  const above = shares.findIndex(value => value >= share)
  const [x1 = 0, s1 = 0] = [x[above], shares[above]]
  if (above === 0) return x1
  const [x0 = 0, s0 = 0] = [x[above - 1], shares[above - 1]]
  return x0 + ((share - s0) / (s1 - s0)) * (x1 - x0)
}

/**
 * Spearman-Karber estimate of the point where half passes, without a model of the curve.
 *
 * With `trim`, the share of each tail that is left out (Hamilton, Russo & Thurston, Environ. Sci. Technol. 11 (1977)
 * 714), it also answers where the shares do not reach 0 and 1. Untrimmed source: Finney, Statistical Method in
 * Biological Assay (1978).
 *
 * @param x - log exposures, rising
 * @param passed - features that passed at each
 * @param total - features judged at each
 * @example
 * spearmanKarber({ x: [0, 1, 2], passed: [0, 5, 10], total: [10, 10, 10] }) // mean 1
 */
export function spearmanKarber(data: {
  readonly x: readonly number[]
  readonly passed: readonly number[]
  readonly total: readonly number[]
  readonly trim?: number
}): SpearmanKarberOutcome {
  const { x, total, trim = 0 } = data
  if (x.length < 2) return { kind: 'refused', reason: 'too-few-levels', detail: 'At least two exposures are needed.' }
  const shares = isotonicRegression(data.passed.map((passed, i) => passed / (total[i] ?? 1)), total)
  const first = shares[0] ?? 0
  const last = shares.at(-1) ?? 0
  if (first > trim + 1e-15 || last < 1 - trim - 1e-15) {
    return { kind: 'refused', reason: 'not-spanning', detail: `The shares run from ${first} to ${last}; they must reach ${trim} and ${1 - trim}.` }
  }
  if (trim > 0) {
    const inner = shares.map((share, i) => ({ share, x: x[i] ?? 0 })).filter(point => point.share > trim && point.share < 1 - trim)
    const points = [
      { share: trim, x: interpolate(x, shares, trim) },
      ...inner,
      { share: 1 - trim, x: interpolate(x, shares, 1 - trim) },
    ]
    return { kind: 'fitted', mean: meanOf(points) / (1 - 2 * trim), standardError: null, shares }
  }
  let variance = 0
  for (let i = 1; i < x.length - 1; i++) {
    const share = shares[i] ?? 0
    const n = total[i] ?? 0
    if (share > 0 && share < 1) variance += ((share * (1 - share)) / (n - 1)) * (((x[i + 1] ?? 0) - (x[i - 1] ?? 0)) / 2) ** 2
  }
  const points = shares.map((share, i) => ({ share, x: x[i] ?? 0 }))
  // One judged feature at a partly passed exposure gives no variance: then there is no standard error to show.
  return { kind: 'fitted', mean: meanOf(points), standardError: Number.isFinite(variance) ? Math.sqrt(variance) : null, shares }
}

function meanOf(points: readonly { readonly share: number; readonly x: number }[]): number {
  let mean = 0
  for (let i = 1; i < points.length; i++) {
    const [a, b] = [points[i - 1], points[i]]
    if (a !== undefined && b !== undefined) mean += (b.share - a.share) * ((a.x + b.x) / 2)
  }
  return mean
}
