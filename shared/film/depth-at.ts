import { tQuantile } from '../stats/quantiles.ts'
import { StatsError, type Interval } from '../stats/types.ts'
import { singleFilmVariance } from './exposure-for-depth.ts'
import type { WorkingCurveFit } from './types.ts'

export interface DepthAt {
  readonly exposure: number
  readonly depthMicrometres: number
  /** Of the mean depth. */
  readonly confidenceInterval: Interval
  /** Of one new film. */
  readonly predictionInterval: Interval
  /** True where the exposure lies outside the measured ones. */
  readonly extrapolated: boolean
}

/**
 * The cured depth at an exposure: mean, its confidence interval, and the prediction interval of one new film.
 *
 * @throws {StatsError} `exposure-out-of-range`
 * @example
 * depthAt(fit, 8).predictionInterval // µm
 */
export function depthAt(fit: WorkingCurveFit, exposure: number): DepthAt {
  if (!(exposure > 0) || !Number.isFinite(exposure)) throw new StatsError('exposure-out-of-range', `exposure must be above zero, got ${exposure}`)
  const { meanLogExposure, meanDepthMicrometres, sumSquaresLogExposure, sumWeights } = fit.centre
  const distance = Math.log(exposure) - meanLogExposure
  const depth = meanDepthMicrometres + fit.penetrationDepthMicrometres.value * distance
  const meanVariance = fit.residualStandardDeviation ** 2 * (1 / sumWeights + distance ** 2 / sumSquaresLogExposure)
  const interval = (variance: number): Interval => {
    if (fit.degreesOfFreedom < 1) return { kind: 'unbounded' }
    const half = tQuantile(0.5 + fit.confidenceLevel / 2, fit.degreesOfFreedom) * Math.sqrt(variance)
    return { kind: 'finite', lower: depth - half, upper: depth + half }
  }
  return {
    exposure,
    depthMicrometres: depth,
    confidenceInterval: interval(meanVariance),
    predictionInterval: interval(meanVariance + singleFilmVariance(fit, depth)),
    extrapolated: exposure < fit.measuredRange.exposureMin || exposure > fit.measuredRange.exposureMax,
  }
}
