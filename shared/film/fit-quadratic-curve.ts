import { leastSquares } from '../stats/least-squares.ts'
import { tQuantile } from '../stats/quantiles.ts'
import type { Estimate } from '../stats/types.ts'
import type { FilmModelRefusal, QuadraticFit } from './film-model-types.ts'
import type { WorkingCurveOptions } from './fit-working-curve.ts'
import { prepareModelData } from './model-data.ts'

/**
 * Fits depth = c0 + c1 u + c2 u² with u = ln E about its mean: an empirical bend, for broad-band light or bleaching.
 *
 * @throws {StatsError} as `fitWorkingCurve`
 * @example
 * const outcome = fitQuadraticCurve({ readings, exposureKind: 'mJ/cm2' })
 * if (outcome.kind === 'fitted') outcome.bendMicrometres.interval
 */
export function fitQuadraticCurve(options: WorkingCurveOptions): QuadraticFit | FilmModelRefusal {
  const data = prepareModelData(options)
  if (data.kind === 'refused') return data
  const { line, points, levels } = data
  const { meanLogExposure } = line.centre
  const outcome = leastSquares({
    design: points.map(point => {
      const u = Math.log(point.exposure) - meanLogExposure
      return [1, u, u * u]
    }),
    y: points.map(point => point.depthMicrometres),
    weights: points.map(point => point.weight),
  })
  if (outcome.kind === 'refused') return outcome
  const { degreesOfFreedom } = outcome
  const estimate = (index: number): Estimate => {
    const value = outcome.coefficients[index] ?? 0
    const standardError = outcome.standardErrors[index] ?? Infinity
    if (degreesOfFreedom < 1) return { value, standardError: Infinity, interval: { kind: 'unbounded' } }
    const half = tQuantile(0.5 + line.confidenceLevel / 2, degreesOfFreedom) * standardError
    return { value, standardError, interval: { kind: 'finite', lower: value - half, upper: value + half } }
  }
  return {
    kind: 'fitted',
    model: 'quadratic',
    exposureKind: line.exposureKind,
    confidenceLevel: line.confidenceLevel,
    points,
    levels,
    coefficients: outcome.coefficients,
    covariance: outcome.covariance,
    residuals: outcome.residuals,
    residualSumOfSquares: outcome.residualSumOfSquares,
    degreesOfFreedom,
    residualStandardDeviation: outcome.residualStandardDeviation,
    measuredRange: line.measuredRange,
    meanLogExposure,
    bendMicrometres: estimate(2),
    slopeAtCentreMicrometres: estimate(1),
  }
}
