import { fieller } from '../stats/fieller.ts'
import { fitRobustLine } from '../stats/fit-robust-line.ts'
import { tQuantile } from '../stats/quantiles.ts'
import type { Estimate, Interval, Refused } from '../stats/types.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import { exposureForDepth } from './exposure-for-depth.ts'
import { fitWorkingCurve, type WorkingCurveOptions } from './fit-working-curve.ts'
import type { WorkingCurveFit, WorkingCurveRefusal } from './types.ts'

export interface RobustWorkingCurve {
  readonly kind: 'fitted'
  readonly confidenceLevel: number
  readonly penetrationDepthMicrometres: Estimate
  readonly criticalExposure: Estimate
  /** Scatter of the films that agree, in µm. */
  readonly scaleMicrometres: number
  /** From 0 (left aside) to 1, in the order of the straight line's points. */
  readonly robustWeights: readonly number[]
  readonly straightLine: WorkingCurveFit
  /** True where an answer of the robust curve lies outside the straight line's interval: then both are shown. */
  readonly differs: boolean
  /** The answers behind the verdict. */
  readonly answers: readonly {
    readonly depthMicrometres: number
    readonly straight: number
    readonly straightInterval: Interval
    readonly robust: number
    readonly outside: boolean
  }[]
  readonly sentence: string
}

export type RobustWorkingCurveOutcome =
  | RobustWorkingCurve
  | WorkingCurveRefusal
  | Refused<'too-few-points' | 'no-spread' | 'not-converged'>

/**
 * The working curve by a bisquare M-estimate, beside the straight line and never silently instead of it.
 *
 * Weights of the films are not used: a robust fit finds for itself which films to trust.
 *
 * @param options.depthMicrometres - target depth to judge the difference at, beside the thinnest, middle and thickest
 * @throws {StatsError} as `fitWorkingCurve`
 * @example
 * const outcome = fitRobustWorkingCurve({ readings, exposureKind: 'seconds', depthMicrometres: 100 })
 * if (outcome.kind === 'fitted' && outcome.differs) outcome.sentence
 */
export function fitRobustWorkingCurve(
  options: Omit<WorkingCurveOptions, 'weighting'> & { readonly depthMicrometres?: number },
): RobustWorkingCurveOutcome {
  const straightLine = fitWorkingCurve({ ...options, weighting: 'equal' })
  if (straightLine.kind === 'refused') return straightLine
  const { points, confidenceLevel, measuredRange } = straightLine
  const robust = fitRobustLine({ x: points.map(point => Math.log(point.exposure)), y: points.map(point => point.depthMicrometres) })
  if (robust.kind === 'refused') return robust
  if (!(robust.slope > 0)) return { kind: 'refused', reason: 'slope-not-positive', detail: 'Most films do not get thicker with exposure.' }
  const { centre, slope } = robust
  const quantile = tQuantile(0.5 + confidenceLevel / 2, robust.degreesOfFreedom)
  const robustExposure = (depth: number): number => Math.exp(centre.x + (depth - centre.y) / slope)
  const criticalExposure = robustExposure(0)
  const logVariance = (centre.heightVariance + (centre.y / slope) ** 2 * centre.slopeVariance) / slope ** 2
  const half = quantile * robust.slopeStandardError
  const { depthMicrometresMin: thinnest, depthMicrometresMax: thickest } = measuredRange
  const depths = [...(options.depthMicrometres === undefined ? [] : [options.depthMicrometres]), thinnest, (thinnest + thickest) / 2, thickest]
  const answers = depths.map(depthMicrometres => {
    const straight = exposureForDepth(straightLine, depthMicrometres)
    const value = robustExposure(depthMicrometres)
    const interval = straight.meanInterval
    return {
      depthMicrometres,
      straight: straight.value,
      straightInterval: interval,
      robust: value,
      outside: interval.kind === 'finite' && (value < interval.lower || value > interval.upper),
    }
  })
  const differs = answers.some(answer => answer.outside)
  return {
    kind: 'fitted',
    confidenceLevel,
    penetrationDepthMicrometres: { value: slope, standardError: robust.slopeStandardError, interval: { kind: 'finite', lower: slope - half, upper: slope + half } },
    criticalExposure: {
      value: criticalExposure,
      standardError: criticalExposure * Math.sqrt(logVariance),
      interval: exponentiate(
        fieller({ numerator: -centre.y, denominator: slope, numeratorVariance: centre.heightVariance, denominatorVariance: centre.slopeVariance, covariance: 0, quantile }),
        centre.x,
      ),
    },
    scaleMicrometres: robust.scale,
    robustWeights: robust.robustWeights,
    straightLine,
    differs,
    answers,
    sentence: sentenceFor(answers, robust.robustWeights),
  }
}

function sentenceFor(answers: RobustWorkingCurve['answers'], weights: readonly number[]): string {
  const first = answers.find(answer => answer.outside)
  if (first === undefined) return 'A curve that trusts no single film gives the same answer within the interval.'
  const change = 100 * (first.robust / first.straight - 1)
  const aside = weights.filter(weight => weight < 0.2).length
  const films = aside === 0 ? 'films far from the others' : aside === 1 ? 'one film' : `${aside} films`
  // One slip by a factor of a hundred throws the straight line anywhere: a percentage would say nothing.
  const amount = change > 100 ? 'several times the exposure' : `${Math.abs(change).toFixed(1)} % ${change < 0 ? 'less' : 'more'} exposure`
  return `A curve that trusts no single film sets ${films} aside and asks for ${amount} for ${Math.round(first.depthMicrometres)} µm, outside the interval. Look at those films before you use either.`
}
