import { fieller } from '../stats/fieller.ts'
import { moverSum, negate, type Ranged } from '../stats/mover.ts'
import { tQuantile, tTwoSidedTail } from '../stats/quantiles.ts'
import { StatsError, type Interval, type Refused } from '../stats/types.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import { exposureForDepth } from './exposure-for-depth.ts'
import type { WorkingCurveFit } from './types.ts'

export interface PotencyComparison {
  readonly kind: 'compared'
  readonly depthMicrometres: number
  /** Exposure of the second over exposure of the first at the target depth, from separate lines (MOVER of Fieller). */
  readonly potencyRatio: { readonly value: number; readonly interval: Interval }
  /** Slope of the second over the first, with its 90 % interval, and whether it shows equivalence (0.8 to 1.25). */
  readonly slopeRatio: { readonly value: number; readonly interval: Interval; readonly equivalenceShown: boolean }
  /** For the record only: a test that does not reject proves nothing. */
  readonly parallelism: { readonly t: number; readonly degreesOfFreedom: number; readonly pValue: number }
  /** One ratio for all depths; only where slope equivalence is shown and the wavelengths are the same. */
  readonly pooled:
    | { readonly kind: 'offered'; readonly value: number; readonly interval: Interval; readonly penetrationDepthMicrometres: number; readonly sentence: string }
    | Refused<'slopes-not-shown-equal' | 'wavelengths-differ' | 'unequal-weights'>
  readonly extrapolated: boolean
}

export type ComparisonOutcome = PotencyComparison | Refused<'exposure-kinds-differ' | 'no-degrees-of-freedom'>

/** Interval of ln exposure at a depth. */
function rangedLog(fit: WorkingCurveFit, depthMicrometres: number): Ranged {
  const { value, meanInterval } = exposureForDepth(fit, depthMicrometres)
  return {
    value: Math.log(value),
    interval: meanInterval.kind === 'finite'
      ? { kind: 'finite', lower: Math.log(meanInterval.lower), upper: Math.log(meanInterval.upper) }
      : { kind: 'unbounded' },
  }
}

/**
 * How much longer the second of two curves must be exposed for the same depth: the potency ratio.
 *
 * From separate lines at the target depth it holds 95 to 97 % coverage even where the slopes differ; the pooled ratio
 * of parallel lines is narrower and badly wrong when they are not parallel, so it needs slope equivalence shown.
 *
 * Sources: Finney, Statistical Method in Biological Assay (1978), parallel-line assay; Zou & Donner (2008), MOVER.
 *
 * @param fits - exactly two, in one exposure kind
 * @param options.depthMicrometres - the target depth
 * @param options.sameWavelength - whether both light engines have one wavelength (@default false)
 * @throws {StatsError} `two-fits-needed`
 * @example
 * compareWorkingCurves([printerA, printerB], { depthMicrometres: 100 })
 */
export function compareWorkingCurves(
  fits: readonly WorkingCurveFit[],
  options: { readonly depthMicrometres: number; readonly sameWavelength?: boolean },
): ComparisonOutcome {
  const [first, second] = fits
  if (fits.length !== 2 || first === undefined || second === undefined) throw new StatsError('two-fits-needed', `compareWorkingCurves takes two fits, got ${fits.length}`)
  if (first.exposureKind !== second.exposureKind) {
    return { kind: 'refused', reason: 'exposure-kinds-differ', detail: 'One curve is in seconds, the other in mJ/cm²: compare like with like.' }
  }
  if (first.degreesOfFreedom < 1 || second.degreesOfFreedom < 1) {
    return { kind: 'refused', reason: 'no-degrees-of-freedom', detail: 'Both curves need at least three films to be compared.' }
  }
  const { depthMicrometres, sameWavelength = false } = options
  const [a, b] = [rangedLog(first, depthMicrometres), rangedLog(second, depthMicrometres)]

  const degreesOfFreedom = first.degreesOfFreedom + second.degreesOfFreedom
  const sumOfSquares = (fit: WorkingCurveFit) => fit.residualStandardDeviation ** 2 * fit.degreesOfFreedom
  const variance = (sumOfSquares(first) + sumOfSquares(second)) / degreesOfFreedom
  const slopes = [first.penetrationDepthMicrometres.value, second.penetrationDepthMicrometres.value] as const
  const slopeVariances = [variance / first.centre.sumSquaresLogExposure, variance / second.centre.sumSquaresLogExposure] as const
  const slopeInterval = fieller({
    numerator: slopes[1], denominator: slopes[0], numeratorVariance: slopeVariances[1], denominatorVariance: slopeVariances[0],
    covariance: 0, quantile: tQuantile(0.95, degreesOfFreedom),
  })
  const equivalenceShown = slopeInterval.kind === 'finite' && slopeInterval.lower >= 0.8 && slopeInterval.upper <= 1.25
  const t = (slopes[1] - slopes[0]) / Math.sqrt(slopeVariances[0] + slopeVariances[1])

  return {
    kind: 'compared',
    depthMicrometres,
    potencyRatio: { value: Math.exp(b.value - a.value), interval: exponentiate(moverSum([b, negate(a)])) },
    slopeRatio: { value: slopes[1] / slopes[0], interval: slopeInterval, equivalenceShown },
    parallelism: { t, degreesOfFreedom, pValue: Number.isFinite(t) ? tTwoSidedTail(t, degreesOfFreedom) : 1 },
    pooled: pooledRatio(first, second, { equivalenceShown, sameWavelength }),
    extrapolated: exposureForDepth(first, depthMicrometres).extrapolated || exposureForDepth(second, depthMicrometres).extrapolated,
  }
}

const pooledSentence = 'One ratio for all depths, and a narrower interval; right only if both curves truly have one Dp. With Dp 10 % apart, its 95 % become 80 to 90 %.'

/** ln ρ = (x̄₁ − x̄₂) + (ȳ₂ − ȳ₁)/b turned to "second over first", with one slope and Fieller on n − 3 degrees of freedom. */
function pooledRatio(first: WorkingCurveFit, second: WorkingCurveFit, shown: { equivalenceShown: boolean; sameWavelength: boolean }): PotencyComparison['pooled'] {
  if (!shown.sameWavelength) return { kind: 'refused', reason: 'wavelengths-differ', detail: 'Dp depends on the wavelength: one ratio for all depths needs the same light.' }
  if (!shown.equivalenceShown) {
    return { kind: 'refused', reason: 'slopes-not-shown-equal', detail: 'It is not shown that both curves have one slope (90 % interval of the slope ratio within 0.8 to 1.25). Use the ratio at the target depth.' }
  }
  if (first.weighting !== 'equal' || second.weighting !== 'equal') {
    return { kind: 'refused', reason: 'unequal-weights', detail: 'The pooled ratio is made for equal weights.' }
  }
  const [p, q] = [first.centre, second.centre]
  const squares = p.sumSquaresLogExposure + q.sumSquaresLogExposure
  const slope = (first.penetrationDepthMicrometres.value * p.sumSquaresLogExposure + second.penetrationDepthMicrometres.value * q.sumSquaresLogExposure) / squares
  const degreesOfFreedom = first.filmCount + second.filmCount - 3
  const sumOfSquares = (fit: WorkingCurveFit) =>
    fit.residualStandardDeviation ** 2 * fit.degreesOfFreedom + (fit.penetrationDepthMicrometres.value - slope) ** 2 * fit.centre.sumSquaresLogExposure
  const variance = (sumOfSquares(first) + sumOfSquares(second)) / degreesOfFreedom
  const numerator = p.meanDepthMicrometres - q.meanDepthMicrometres
  const interval = fieller({
    numerator, denominator: slope,
    numeratorVariance: variance * (1 / first.filmCount + 1 / second.filmCount), denominatorVariance: variance / squares,
    covariance: 0, quantile: tQuantile(0.5 + first.confidenceLevel / 2, degreesOfFreedom),
  })
  const shift = q.meanLogExposure - p.meanLogExposure
  return { kind: 'offered', value: Math.exp(shift + numerator / slope), interval: exponentiate(interval, shift), penetrationDepthMicrometres: slope, sentence: pooledSentence }
}
