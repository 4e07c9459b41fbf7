import type { Interval } from './types.ts'

/**
 * Confidence set of a ratio of two normal estimates (Fieller, JRSS B 16 (1954) 175).
 *
 * Never symmetric, and honest where the denominator is not clearly different from zero: then it is the outside of two
 * roots (`exclusive`) or everything (`unbounded`).
 *
 * @param ratio.quantile - of t or the normal, such as 2.776 for 95 % with 4 degrees of freedom
 * @example
 * fieller({ numerator: 10, denominator: 5, numeratorVariance: 1, denominatorVariance: 0.25, covariance: 0, quantile: 1.96 })
 */
export function fieller(ratio: {
  readonly numerator: number
  readonly denominator: number
  readonly numeratorVariance: number
  readonly denominatorVariance: number
  readonly covariance: number
  readonly quantile: number
}): Interval {
  const { numerator, denominator } = ratio
  const square = ratio.quantile ** 2
  const a = denominator ** 2 - square * ratio.denominatorVariance
  const halfB = numerator * denominator - square * ratio.covariance
  const c = numerator ** 2 - square * ratio.numeratorVariance
  const difference = halfB ** 2 - a * c
  // With a clear denominator there are always two roots: less than zero is rounding, where the variances are next to nothing.
  const discriminant = a > 0 ? Math.max(0, difference) : difference
  if (!Number.isFinite(discriminant) || discriminant < 0 || a === 0) return { kind: 'unbounded' }
  // The root of larger size first, the other from the product of both: no digits are lost by cancellation.
  const far = halfB + (halfB >= 0 ? 1 : -1) * Math.sqrt(discriminant)
  const first = far / a
  const second = far === 0 ? 0 : c / far
  const [lower, upper] = first <= second ? [first, second] : [second, first]
  return a > 0 ? { kind: 'finite', lower, upper } : { kind: 'exclusive', roots: [lower, upper] }
}
