import { linkAt } from '../stats/binomial-link.ts'
import { StatsError } from '../stats/types.ts'
import { bracketedBy, directionOf } from './bracketing.ts'
import type { CurveDraws, EdgeBelief, ShareBand } from './edge-belief.ts'
import type { EdgePrior } from './edge-prior.ts'
import type { FeatureKind, Tally } from './types.ts'

/** Fine enough for the second decimal of a second at any exposure that printers use. */
const binWidth = 0.002
/** Edges further than this from the grid are prior tails that no answer shows. */
const binReach = 4

export interface EdgeGrid {
  readonly kind: FeatureKind
  readonly tallies: readonly Tally[]
  readonly prior: EdgePrior
  /** First edge of the grid: ln exposure, mirrored for must-stay-open. */
  readonly edgeStart: number
  readonly logStep: number
  readonly edgeCount: number
  /** Slopes on ln exposure, one for each width of the grid. */
  readonly slopes: Float64Array
  /** Posterior mass of slope i and edge j at i * edgeCount + j; sums to one. */
  readonly mass: Float64Array
  readonly printSpread: readonly { readonly spread: number; readonly probability: number }[]
}

/** Posterior of one edge; see `edgePosterior`. */
export class EdgePosterior implements EdgeBelief {
  constructor(readonly grid: EdgeGrid) {}

  get kind(): FeatureKind {
    return this.grid.kind
  }

  get bracketed(): boolean {
    return bracketedBy(this.grid.tallies)
  }

  get direction(): 'lower' | 'higher' | 'none' {
    return directionOf(this.grid.tallies, this.kind)
  }

  /**
   * Exposures below which the edge of a share lies with the given probabilities.
   *
   * The mass of each cell is spread evenly over its width in fine bins, so that quantiles move smoothly with the data.
   *
   * @param share - of features that must pass, inside (0, 1); 0.5 is the edge itself
   * @param probabilities - each inside (0, 1)
   * @throws {StatsError} `share-out-of-range`
   */
  quantiles(share: number, probabilities: readonly number[]): number[] {
    const { start, bins } = this.edgeBins(share)
    const sign = this.kind === 'must-form' ? 1 : -1
    const wanted = probabilities.map(probability => (sign === 1 ? probability : 1 - probability))
    return wanted.map(probability => {
      let below = 0
      for (let i = 0; i < bins.length; i++) {
        const mass = bins[i] ?? 0
        if (below + mass >= probability && mass > 0) {
          return Math.exp(sign * (start + (i + (probability - below) / mass) * binWidth))
        }
        below += mass
      }
      return Math.exp(sign * (start + bins.length * binWidth))
    })
  }

  private edgeBins(share: number): { start: number; bins: Float64Array } {
    if (!(share > 0 && share < 1)) throw new StatsError('share-out-of-range', `share must be inside (0, 1), got ${share}`)
    const { edgeStart, edgeCount, logStep, slopes, mass } = this.grid
    const logit = linkAt('logit', share)
    const start = edgeStart - binReach
    const bins = new Float64Array(Math.ceil((edgeCount * logStep + 2 * binReach) / binWidth))
    const last = bins.length - 1
    for (let i = 0; i < slopes.length; i++) {
      const shift = logit / (slopes[i] ?? 1)
      for (let j = 0; j < edgeCount; j++) {
        const weight = mass[i * edgeCount + j] ?? 0
        if (weight === 0) continue
        const from = (edgeStart + (j - 0.5) * logStep + shift - start) / binWidth
        const to = from + logStep / binWidth
        // Mass beyond the bins is kept in the end bins: nothing is lost from the total.
        const first = Math.min(last, Math.max(0, Math.floor(from)))
        const final = Math.min(last, Math.max(0, Math.floor(to)))
        if (first === final) {
          bins[first] = (bins[first] ?? 0) + weight
          continue
        }
        const density = weight / (to - from)
        bins[first] = (bins[first] ?? 0) + density * (first + 1 - from)
        for (let b = first + 1; b < final; b++) bins[b] = (bins[b] ?? 0) + density
        bins[final] = (bins[final] ?? 0) + density * (to - final)
      }
    }
    return { start, bins }
  }

  /** Posterior mean of the share that passes at an exposure, without misreads and print spread. */
  meanShareAt(exposure: number): number {
    let mean = 0
    this.eachCell(exposure, (share, weight) => {
      mean += share * weight
    })
    return mean
  }

  /**
   * Share of features that passes at an exposure: mean and equal-tailed band.
   *
   * @param confidenceLevel - of the band (@default 0.95)
   */
  shareAt(exposure: number, confidenceLevel = 0.95): ShareBand {
    const count = 2000
    const histogram = new Float64Array(count)
    let mean = 0
    this.eachCell(exposure, (share, weight) => {
      mean += share * weight
      const bin = Math.min(count - 1, Math.floor(share * count))
      histogram[bin] = (histogram[bin] ?? 0) + weight
    })
    const at = (probability: number): number => {
      let below = 0
      for (let i = 0; i < count; i++) {
        const weight = histogram[i] ?? 0
        if (below + weight >= probability && weight > 0) return (i + (probability - below) / weight) / count
        below += weight
      }
      return 1
    }
    return { mean, lower: at((1 - confidenceLevel) / 2), upper: at((1 + confidenceLevel) / 2) }
  }

  private eachCell(exposure: number, visit: (share: number, weight: number) => void): void {
    const { edgeStart, edgeCount, logStep, slopes, mass } = this.grid
    const x = (this.kind === 'must-form' ? 1 : -1) * Math.log(exposure)
    for (let i = 0; i < slopes.length; i++) {
      const slope = slopes[i] ?? 0
      for (let j = 0; j < edgeCount; j++) {
        const weight = mass[i * edgeCount + j] ?? 0
        if (weight > 0) visit(1 / (1 + Math.exp(-slope * (x - edgeStart - j * logStep))), weight)
      }
    }
  }

  /**
   * Curves that stand for the posterior, spread evenly through its mass (systematic resampling): the same draws for the
   * same data, so that answers do not flicker.
   *
   * @param count - how many (@default 2000)
   */
  draws(count = 2000): CurveDraws {
    const { edgeStart, edgeCount, logStep, slopes, mass } = this.grid
    const sign = this.kind === 'must-form' ? 1 : -1
    const edges = new Float64Array(count)
    const drawnSlopes = new Float64Array(count)
    let below = 0
    let drawn = 0
    for (let cell = 0; cell < mass.length && drawn < count; cell++) {
      below += mass[cell] ?? 0
      while (drawn < count && (drawn + 0.5) / count <= below) {
        edges[drawn] = sign * (edgeStart + (cell % edgeCount) * logStep)
        drawnSlopes[drawn] = slopes[Math.floor(cell / edgeCount)] ?? 0
        drawn++
      }
    }
    for (; drawn < count; drawn++) {
      edges[drawn] = edges[drawn - 1] ?? 0
      drawnSlopes[drawn] = drawnSlopes[drawn - 1] ?? 0
    }
    return { edges, slopes: drawnSlopes }
  }
}
