import { linkAt } from '../stats/binomial-link.ts'
import { StatsError } from '../stats/types.ts'
import { bracketedBy, directionOf } from './bracketing.ts'
import type { CurveDraws, EdgeBelief, ShareBand } from './edge-belief.ts'
import type { FeatureKind, Tally } from './types.ts'

function quantileOf(sorted: Float64Array, probability: number): number {
  const position = Math.min(1, Math.max(0, probability)) * (sorted.length - 1)
  const below = Math.floor(position)
  const low = sorted[below] ?? 0
  return low + (position - below) * ((sorted[below + 1] ?? low) - low)
}

/** An edge known by equally weighted draws; see `gradedEdge`. */
export class DrawnEdge implements EdgeBelief {
  readonly kind: FeatureKind
  readonly bracketed: boolean
  readonly direction: 'lower' | 'higher' | 'none'
  private readonly edges: Float64Array
  private readonly slopes: Float64Array

  constructor(facts: { kind: FeatureKind; edges: Float64Array; slopes: Float64Array; tallies: readonly Tally[] }) {
    this.kind = facts.kind
    this.edges = facts.edges
    this.slopes = facts.slopes
    this.bracketed = bracketedBy(facts.tallies)
    this.direction = directionOf(facts.tallies, facts.kind)
  }

  quantiles(share: number, probabilities: readonly number[]): number[] {
    if (!(share > 0 && share < 1)) throw new StatsError('share-out-of-range', `share must be inside (0, 1), got ${share}`)
    const logit = (this.kind === 'must-form' ? 1 : -1) * linkAt('logit', share)
    const sorted = this.edges.map((edge, i) => edge + logit / (this.slopes[i] ?? 1)).sort()
    return probabilities.map(probability => Math.exp(quantileOf(sorted, probability)))
  }

  private sharesAt(exposure: number): Float64Array {
    const sign = this.kind === 'must-form' ? 1 : -1
    const x = Math.log(exposure)
    return this.edges.map((edge, i) => 1 / (1 + Math.exp(-sign * (this.slopes[i] ?? 1) * (x - edge))))
  }

  meanShareAt(exposure: number): number {
    const shares = this.sharesAt(exposure)
    return shares.reduce((sum, share) => sum + share, 0) / shares.length
  }

  shareAt(exposure: number, confidenceLevel = 0.95): ShareBand {
    const shares = this.sharesAt(exposure).sort()
    const tail = (1 - confidenceLevel) / 2
    return {
      mean: shares.reduce((sum, share) => sum + share, 0) / shares.length,
      lower: quantileOf(shares, tail),
      upper: quantileOf(shares, 1 - tail),
    }
  }

  draws(count = 2000): CurveDraws {
    const pick = (values: Float64Array) => Float64Array.from({ length: count }, (_, i) => values[Math.floor(((i + 0.5) / count) * values.length)] ?? 0)
    return { edges: pick(this.edges), slopes: pick(this.slopes) }
  }
}
