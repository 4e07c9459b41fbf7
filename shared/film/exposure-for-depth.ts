import { fieller } from '../stats/fieller.ts'
import { tQuantile } from '../stats/quantiles.ts'
import { StatsError, type Interval } from '../stats/types.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import type { ExposureForDepth, WorkingCurveFit } from './types.ts'

/** Residual variance of one new film of a depth, by the weights of the fit. */
export function singleFilmVariance(fit: WorkingCurveFit, depthMicrometres: number): number {
  const variance = fit.residualStandardDeviation ** 2
  if (fit.weighting === 'equal') return variance
  if (fit.weighting === 'proportional') return variance * depthMicrometres ** 2
  // Stated weights: a new film is taken to be read as well as the average film was.
  return (variance * fit.filmCount) / fit.centre.sumWeights
}

/**
 * The exposure that cures to a depth, with the interval of the mean curve and of one new film (Fieller).
 *
 * @param depthMicrometres - any finite depth; 0 gives the critical exposure
 * @throws {StatsError} `depth-out-of-range`
 * @example
 * exposureForDepth(fit, 100).meanInterval // exposures whose mean film is 100 µm
 */
export function exposureForDepth(fit: WorkingCurveFit, depthMicrometres: number): ExposureForDepth {
  if (!Number.isFinite(depthMicrometres)) throw new StatsError('depth-out-of-range', `depth must be a finite number, got ${depthMicrometres}`)
  const { meanLogExposure, meanDepthMicrometres, sumSquaresLogExposure, sumWeights } = fit.centre
  const slope = fit.penetrationDepthMicrometres.value
  const distance = depthMicrometres - meanDepthMicrometres
  const variance = fit.residualStandardDeviation ** 2
  const interval = (extraVariance: number): Interval => {
    if (fit.degreesOfFreedom < 1) return { kind: 'unbounded' }
    return exponentiate(fieller({
      numerator: distance,
      denominator: slope,
      numeratorVariance: variance / sumWeights + extraVariance,
      denominatorVariance: variance / sumSquaresLogExposure,
      covariance: 0,
      quantile: tQuantile(0.5 + fit.confidenceLevel / 2, fit.degreesOfFreedom),
    }), meanLogExposure)
  }
  const { depthMicrometresMin, depthMicrometresMax } = fit.measuredRange
  return {
    depthMicrometres,
    // A depth far beyond any film would overflow; the answer stays a number, and says that it is extrapolated.
    value: Math.min(Number.MAX_VALUE, Math.exp(meanLogExposure + distance / slope)),
    meanInterval: interval(0),
    singleInterval: interval(singleFilmVariance(fit, depthMicrometres)),
    extrapolated: depthMicrometres < depthMicrometresMin || depthMicrometres > depthMicrometresMax,
  }
}
