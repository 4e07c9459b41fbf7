import { fitTobit, type TobitFit } from '../stats/fit-tobit.ts'
import { tQuantile } from '../stats/quantiles.ts'
import { smoothProfileEnds } from '../stats/smooth-profile-ends.ts'
import { StatsError, type Estimate, type Interval, type Refused } from '../stats/types.ts'
import { collectCensoredFilms, type CensoredFilms } from './censored-films.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import type { ExposureKind, FilmReading, WorkingCurveRefusal } from './types.ts'

export interface CensoredWorkingCurve {
  readonly kind: 'fitted'
  readonly exposureKind: ExposureKind
  readonly confidenceLevel: number
  readonly limitMicrometres: number
  readonly penetrationDepthMicrometres: Estimate
  readonly criticalExposure: Estimate
  /** ML divides by the number of films; this is by the degrees of freedom, as for the straight line. */
  readonly residualStandardDeviation: number
  /** Measured films less two. */
  readonly degreesOfFreedom: number
  readonly measuredCount: number
  readonly censoredCount: number
  readonly logLikelihood: number
  /** What `censoredExposureForDepth` works from. */
  readonly films: CensoredFilms
  readonly meanLogExposure: number
  /** Of the line around the mean of ln exposure, in µm. */
  readonly coefficients: readonly [number, number]
}

export type CensoredWorkingCurveOutcome =
  | CensoredWorkingCurve
  | WorkingCurveRefusal
  | Refused<'too-few-measured' | 'no-scatter' | 'not-converged'>

/** How far an end of ln exposure is looked for: a factor of about 20 000. */
const reach = 10

/**
 * The working curve with films that did not form, or were lost in the wash, as "thinner than measurable".
 *
 * Maximum likelihood (Tobit). Intervals are likelihood profiles with the limit n ln(1 + t²/df), n and df from the
 * measured films: without missing films they are exactly those of the straight line (t and Fieller), where the usual
 * chi-square limit is too narrow for so few films. Coverage: `npm run simulate`.
 *
 * @param options.limitMicrometres - thinnest film that would have held and been measured
 * @throws {StatsError} `limit-out-of-range`, `level-out-of-range`, and as `fitWorkingCurve`
 * @example
 * fitCensoredWorkingCurve({ readings, exposureKind: 'seconds', limitMicrometres: 20 })
 */
export function fitCensoredWorkingCurve(options: {
  readonly readings: readonly FilmReading[]
  readonly exposureKind: ExposureKind
  readonly limitMicrometres: number
  readonly confidenceLevel?: number
}): CensoredWorkingCurveOutcome {
  const { exposureKind, limitMicrometres, confidenceLevel = 0.95 } = options
  if (!(confidenceLevel > 0 && confidenceLevel < 1)) throw new StatsError('level-out-of-range', `confidenceLevel must be inside (0, 1), got ${confidenceLevel}`)
  const films = collectCensoredFilms(options.readings, limitMicrometres)
  const { x, depths, censored, measuredCount, censoredCount } = films
  if (measuredCount === 0) return { kind: 'refused', reason: 'no-films', detail: 'No film was measured: missing films alone make no curve. Expose longer.' }
  if (measuredCount < 3) {
    return { kind: 'refused', reason: 'too-few-measured', detail: `Missing films can only help three or more measured ones; there ${measuredCount === 1 ? 'is 1' : `are ${measuredCount}`}.` }
  }
  if (x.slice(0, measuredCount).every(value => value === x[0])) {
    return { kind: 'refused', reason: 'one-exposure', detail: 'All measured films have one exposure. Missing films below it do not tell how steep the curve is.' }
  }
  const meanLogExposure = x.reduce((sum, value) => sum + value, 0) / x.length
  const best = fitTobit({ design: x.map(value => [1, value - meanLogExposure]), response: depths, censored })
  if (best.kind === 'refused') return best
  const [height = 0, slope = 0] = best.coefficients
  if (!(slope > 0)) return { kind: 'refused', reason: 'slope-not-positive', detail: 'The films do not get thicker with exposure. Check that exposures and thicknesses stand in the right rows.' }
  const degreesOfFreedom = measuredCount - 2
  const inflation = measuredCount / degreesOfFreedom
  const slopeError = Math.sqrt((best.covariance[1]?.[1] ?? 0) * inflation)
  const fit = { films, meanLogExposure, confidenceLevel, coefficients: [height, slope] as const, logLikelihood: best.logLikelihood, degreesOfFreedom, measuredCount }
  const logEc = meanLogExposure - height / slope
  return {
    kind: 'fitted',
    exposureKind,
    limitMicrometres,
    penetrationDepthMicrometres: { value: slope, standardError: slopeError, interval: slopeInterval(fit, slopeError) },
    criticalExposure: {
      value: Math.exp(logEc),
      standardError: Math.exp(logEc) * logError(best, -height / slope, inflation),
      interval: exposureInterval(fit, 0, logError(best, -height / slope, inflation)),
    },
    residualStandardDeviation: best.sigma * Math.sqrt(inflation),
    censoredCount,
    ...fit,
  }
}

/**
 * The exposure that cures to a depth, by the censored fit; the interval is of the mean curve.
 *
 * @throws {StatsError} `depth-out-of-range`
 */
export function censoredExposureForDepth(
  fit: CensoredWorkingCurve,
  depthMicrometres: number,
): { readonly depthMicrometres: number; readonly value: number; readonly meanInterval: Interval } {
  if (!Number.isFinite(depthMicrometres)) throw new StatsError('depth-out-of-range', `depth must be a finite number, got ${depthMicrometres}`)
  const [height, slope] = fit.coefficients
  const firstStep = fit.penetrationDepthMicrometres.standardError / slope
  return {
    depthMicrometres,
    value: Math.exp(fit.meanLogExposure + (depthMicrometres - height) / slope),
    meanInterval: exposureInterval(fit, depthMicrometres, firstStep),
  }
}

type Profiled = Pick<CensoredWorkingCurve, 'films' | 'meanLogExposure' | 'confidenceLevel' | 'coefficients' | 'logLikelihood' | 'degreesOfFreedom' | 'measuredCount'>

/** By how much the log likelihood may fall: n/2 ln(1 + t²/df) is the exact limit of a line without missing films. */
function allowedDrop(fit: Profiled): number {
  const t = tQuantile(0.5 + fit.confidenceLevel / 2, fit.degreesOfFreedom)
  return (fit.measuredCount / 2) * Math.log1p((t * t) / fit.degreesOfFreedom)
}

/** Best log likelihood of a line through the rest; minus infinity where there is none. */
function logLikelihoodOf(fit: Profiled, column: (x: number) => number, offset: (x: number) => number): number {
  const { x, depths, censored } = fit.films
  const outcome = fitTobit({ design: x.map(value => [column(value)]), response: x.map((value, i) => (depths[i] ?? 0) - offset(value)), censored })
  return outcome.kind === 'fitted' ? outcome.logLikelihood : -Infinity
}

function slopeInterval(fit: Profiled, standardError: number): Interval {
  const slope = fit.coefficients[1]
  const ends = smoothProfileEnds(held => logLikelihoodOf(fit, () => 1, x => held * (x - fit.meanLogExposure)), {
    best: slope, maximum: fit.logLikelihood, drop: allowedDrop(fit), step: standardError, reach: 1000 * (slope + standardError),
  })
  return ends.lower === null || ends.upper === null ? { kind: 'unbounded' } : { kind: 'finite', lower: ends.lower, upper: ends.upper }
}

/** Lines through (x, depth): what the films say about the exposure x of that depth. */
function exposureInterval(fit: Profiled, depth: number, firstStep: number): Interval {
  const [height, slope] = fit.coefficients
  const ends = smoothProfileEnds(held => logLikelihoodOf(fit, x => x - held, () => depth), {
    best: fit.meanLogExposure + (depth - height) / slope,
    maximum: fit.logLikelihood,
    drop: allowedDrop(fit),
    step: Math.max(firstStep, 1e-9),
    reach,
  })
  return ends.lower === null || ends.upper === null ? { kind: 'unbounded' } : exponentiate({ kind: 'finite', lower: ends.lower, upper: ends.upper })
}

/** Standard error of ln exposure at a distance from the mean. */
function logError(best: TobitFit, distance: number, inflation: number): number {
  const at = (i: number, j: number): number => best.covariance[i]?.[j] ?? 0
  return Math.sqrt(Math.max(0, at(0, 0) + 2 * distance * at(0, 1) + distance ** 2 * at(1, 1)) * inflation) / (best.coefficients[1] ?? 1)
}
