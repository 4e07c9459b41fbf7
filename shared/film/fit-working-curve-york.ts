import { fieller } from '../stats/fieller.ts'
import { fitYork, type YorkLine } from '../stats/fit-york.ts'
import { moverSum } from '../stats/mover.ts'
import { normalQuantile, tQuantile } from '../stats/quantiles.ts'
import { StatsError, type Estimate, type Interval, type Refused } from '../stats/types.ts'
import { collectFilms } from './collect-films.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import type { ExposureKind, FilmReading, WorkingCurveRefusal } from './types.ts'

export interface YorkWorkingCurveOptions {
  readonly readings: readonly FilmReading[]
  readonly exposureKind: ExposureKind
  /** Repeatability of the meter or the timer, as a share of the exposure: 0.02 is 2 %. */
  readonly exposureRelativeUncertainty: number
  /** Of a depth whose reading states none. */
  readonly depthStandardUncertaintyMicrometres?: number
  /** Between the errors of ln exposure and depth of a film (@default 0) */
  readonly correlation?: number
  /**
   * Standard uncertainty of the meter's scale, as a share, common to all films. It moves Ec and never Dp; in seconds on
   * one printer there is no meter and it counts nothing (@default 0)
   */
  readonly scaleRelativeUncertainty?: number
  /** @default 0.95 */
  readonly confidenceLevel?: number
}

export interface YorkWorkingCurve {
  readonly kind: 'fitted'
  readonly exposureKind: ExposureKind
  readonly confidenceLevel: number
  readonly penetrationDepthMicrometres: Estimate
  readonly criticalExposure: Estimate
  readonly line: YorkLine
  /** Standard errors were widened by √MSWD, with t in place of the normal: the films scatter more than stated. */
  readonly widened: boolean
}

export type YorkWorkingCurveOutcome =
  | YorkWorkingCurve
  | WorkingCurveRefusal
  | Refused<'too-few-points' | 'no-spread' | 'not-converged'>

/**
 * The working curve where exposures are uncertain themselves, by York regression of depth on ln exposure.
 *
 * The repeatability of the meter enters point by point; an error of its scale is common to all films, so it is added to
 * ln Ec at the end. Where the films scatter more than stated (MSWD above 1) the intervals are widened.
 *
 * @throws {StatsError} `uncertainty-out-of-range`, `uncertainty-missing`, `correlation-out-of-range`, and as `fitWorkingCurve`
 * @example
 * fitWorkingCurveYork({ readings, exposureKind: 'mJ/cm2', exposureRelativeUncertainty: 0.03, depthStandardUncertaintyMicrometres: 5 })
 */
export function fitWorkingCurveYork(options: YorkWorkingCurveOptions): YorkWorkingCurveOutcome {
  const { exposureKind, exposureRelativeUncertainty, correlation = 0, scaleRelativeUncertainty = 0, confidenceLevel = 0.95 } = options
  if (!(confidenceLevel > 0 && confidenceLevel < 1)) throw new StatsError('level-out-of-range', `confidenceLevel must be inside (0, 1), got ${confidenceLevel}`)
  for (const share of [exposureRelativeUncertainty, scaleRelativeUncertainty]) {
    if (!(share >= 0 && share < 1)) throw new StatsError('uncertainty-out-of-range', `a relative uncertainty must be from 0 to below 1, got ${share}`)
  }
  const { films } = collectFilms(options.readings)
  if (films.length === 0) return { kind: 'refused', reason: 'no-films', detail: 'No film is measured yet. Measure films at three or more exposures.' }
  const depthUncertainties = films.map(film => {
    const own = film.standardUncertaintyMicrometres ?? options.depthStandardUncertaintyMicrometres
    if (own === undefined) throw new StatsError('uncertainty-missing', 'state the uncertainty of each depth, or one for all')
    return own
  })
  const line = fitYork({
    x: films.map(film => film.logExposure),
    y: films.map(film => film.depthMicrometres),
    xStandardUncertainties: films.map(() => exposureRelativeUncertainty),
    yStandardUncertainties: depthUncertainties,
    correlations: films.map(() => correlation),
  })
  if (line.kind === 'refused') return line
  if (!(line.slope > 0)) return { kind: 'refused', reason: 'slope-not-positive', detail: 'The films do not get thicker with exposure.' }
  const widened = line.mswd > 1
  const variance = widened ? line.mswd : 1
  const probability = 0.5 + confidenceLevel / 2
  const quantile = widened ? tQuantile(probability, line.degreesOfFreedom) : normalQuantile(probability)
  const { centre, slope } = line
  const slopeVariance = variance / centre.sumSquaresX
  const meanVariance = variance / centre.sumWeights
  const half = quantile * Math.sqrt(slopeVariance)
  // ln Ec as distance from the centre, where slope and height are uncorrelated.
  const distance = -centre.y / slope
  const fromFilms = fieller({ numerator: -centre.y, denominator: slope, numeratorVariance: meanVariance, denominatorVariance: slopeVariance, covariance: 0, quantile })
  const scale = exposureKind === 'mJ/cm2' ? scaleRelativeUncertainty : 0
  const criticalExposure = Math.exp(centre.x + distance)
  const logVariance = (meanVariance + distance ** 2 * slopeVariance) / slope ** 2 + scale ** 2
  return {
    kind: 'fitted',
    exposureKind,
    confidenceLevel,
    penetrationDepthMicrometres: { value: slope, standardError: Math.sqrt(slopeVariance), interval: { kind: 'finite', lower: slope - half, upper: slope + half } },
    criticalExposure: {
      value: criticalExposure,
      standardError: criticalExposure * Math.sqrt(logVariance),
      interval: exponentiate(withScale(fromFilms, distance, normalQuantile(probability) * scale), centre.x),
    },
    line,
    widened,
  }
}

/** Adds the common scale error to an interval of ln Ec; independent of the films, so their halves add in squares. */
function withScale(interval: Interval, value: number, half: number): Interval {
  if (half === 0) return interval
  return moverSum([{ value, interval }, { value: 0, interval: { kind: 'finite', lower: -half, upper: half } }])
}
