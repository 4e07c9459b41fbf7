import { fitNonlinear } from '../stats/fit-nonlinear.ts'
import { tQuantile } from '../stats/quantiles.ts'
import { StatsError, type Estimate } from '../stats/types.ts'
import type { FilmModelRefusal, TwoLineFit } from './film-model-types.ts'
import type { WorkingCurveOptions } from './fit-working-curve.ts'
import { prepareModelData } from './model-data.ts'
import { twoLineDepth, twoLineGradient, twoLineParts } from './two-line-depth.ts'

export interface TwoLineOptions extends WorkingCurveOptions {
  /** Share of the light that is absorbed shallowly, from the spectrum of the light engine; fitted where absent. */
  readonly shallowShare?: number
}

/**
 * Fits E (w e^(−z/D1) + (1 − w) e^(−z/D2)) = Ec, implicit in the depth z: a light engine of two lines, or a broad one
 * on a steep absorption edge.
 *
 * With the share given it has three parameters, otherwise four; films seldom tell four, and then it is refused. All
 * parameters but the share are fitted on the log scale, their intervals too. Bands are linear approximations: 95 % hold
 * 92 to 95 % (`npm run simulate film-lines`).
 *
 * @throws {StatsError} `share-out-of-range`, and as `fitWorkingCurve`
 * @example
 * const outcome = fitTwoLineAttenuation({ readings, exposureKind: 'mJ/cm2', shallowShare: 0.5 })
 * if (outcome.kind === 'fitted') outcome.penetrationDepthsMicrometres[1].value
 */
export function fitTwoLineAttenuation(options: TwoLineOptions): TwoLineFit | FilmModelRefusal {
  const { shallowShare } = options
  if (shallowShare !== undefined && !(shallowShare > 0 && shallowShare < 1)) {
    throw new StatsError('share-out-of-range', `shallowShare must be inside (0, 1), got ${shallowShare}`)
  }
  const data = prepareModelData(options)
  if (data.kind === 'refused') return data
  const { line, points, levels, pureError } = data
  const dp = line.penetrationDepthMicrometres.value
  const logEc = Math.log(line.criticalExposure.value)
  const logits = shallowShare === undefined ? [-1.5, 0, 1.5] : [Math.log(shallowShare / (1 - shallowShare))]
  const starts = logits.flatMap(logit => [0, 1.5].map(logGap => [logEc, Math.log(dp / 1.5), logGap, logit]))
  const outcome = fitNonlinear({
    x: levels.map(level => Math.log(level.exposure)),
    y: levels.map(level => level.depthMicrometres),
    weights: levels.map(level => level.weight),
    pureError,
    model: coefficients => {
      const parts = twoLineParts(coefficients)
      return logExposure => twoLineDepth(parts, logExposure)
    },
    jacobian: coefficients => logExposure => twoLineGradient(coefficients, logExposure),
    starts,
    held: [false, false, false, shallowShare !== undefined],
  })
  if (outcome.kind === 'refused') return outcome
  const { covariance, degreesOfFreedom } = outcome
  const quantile = degreesOfFreedom > 0 ? tQuantile(0.5 + line.confidenceLevel / 2, degreesOfFreedom) : Infinity
  /** From the interval of a transformed value and its derivative by the coefficients. */
  const estimate = (transformed: number, gradient: readonly number[], back: (value: number) => number, backSlope: number): Estimate => {
    let variance = 0
    for (const [i, a] of gradient.entries()) for (const [j, b] of gradient.entries()) variance += a * b * (covariance[i]?.[j] ?? 0)
    const error = Math.sqrt(Math.max(0, variance))
    const value = back(transformed)
    if (degreesOfFreedom < 1) return { value, standardError: Infinity, interval: { kind: 'unbounded' } }
    const [lower, upper] = [back(transformed - quantile * error), back(transformed + quantile * error)]
    return {
      value,
      standardError: backSlope * error,
      interval: Number.isFinite(upper) ? { kind: 'finite', lower, upper } : { kind: 'unbounded' },
    }
  }
  const [logCritical = 0, logShallow = 0, logGap = 0, logit = 0] = outcome.parameters
  const parts = twoLineParts(outcome.parameters)
  const gapShare = Math.exp(logGap) / (1 + Math.exp(logGap))
  return {
    kind: 'fitted',
    model: 'two-line',
    exposureKind: line.exposureKind,
    confidenceLevel: line.confidenceLevel,
    points,
    levels,
    coefficients: outcome.parameters,
    covariance,
    residuals: points.map(point => point.depthMicrometres - twoLineDepth(parts, Math.log(point.exposure))),
    residualSumOfSquares: outcome.residualSumOfSquares,
    degreesOfFreedom,
    residualStandardDeviation: outcome.residualStandardDeviation,
    measuredRange: line.measuredRange,
    criticalExposure: estimate(logCritical, [1, 0, 0, 0], Math.exp, Math.exp(logCritical)),
    penetrationDepthsMicrometres: [
      estimate(logShallow, [0, 1, 0, 0], Math.exp, parts.shallow),
      estimate(Math.log(parts.deep), [0, 1, gapShare, 0], Math.exp, parts.deep),
    ],
    shallowShare: shallowShare === undefined
      ? estimate(logit, [0, 0, 0, 1], value => 1 / (1 + Math.exp(-value)), parts.share * (1 - parts.share))
      : { value: shallowShare, standardError: 0, interval: { kind: 'finite', lower: shallowShare, upper: shallowShare } },
  }
}
