import type { FeatureKind } from './types.ts'

/** A share of features that passes, with its band. */
export interface ShareBand {
  readonly mean: number
  readonly lower: number
  readonly upper: number
}

/** Drawn curves: edges in ln exposure and slopes; draws weigh alike. */
export interface CurveDraws {
  readonly edges: Float64Array
  readonly slopes: Float64Array
}

/** What is known of one edge, however it was found: the window needs no more. */
export interface EdgeBelief {
  readonly kind: FeatureKind
  /**
   * Whether prints lie on both sides: one with at most half passed and one with at least half. Without both, the prior
   * decides one end, so no two-sided interval may be shown.
   */
  readonly bracketed: boolean
  /** Where to print next when the edge is not bracketed. */
  readonly direction: 'lower' | 'higher' | 'none'
  /** Exposures below which the edge of a share lies with the given probabilities. */
  quantiles(share: number, probabilities: readonly number[]): number[]
  /** Mean share that passes at an exposure, without misreads and print spread. */
  meanShareAt(exposure: number): number
  shareAt(exposure: number, confidenceLevel?: number): ShareBand
  draws(count?: number): CurveDraws
}
