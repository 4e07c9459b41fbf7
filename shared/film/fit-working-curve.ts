import { fieller } from '../stats/fieller.ts'
import { lackOfFit } from '../stats/lack-of-fit.ts'
import { tQuantile } from '../stats/quantiles.ts'
import { fitStraightLine, type StraightLine } from '../stats/straight-line.ts'
import { StatsError, type Interval } from '../stats/types.ts'
import { collectFilms, type Film } from './collect-films.ts'
import { curvatureOf } from './curvature.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import { filmFindings } from './film-findings.ts'
import type { ExposureKind, FilmPoint, FilmReading, FilmWeighting, WorkingCurveFit, WorkingCurveOutcome, WorkingCurveRefusal } from './types.ts'

export interface WorkingCurveOptions {
  readonly readings: readonly FilmReading[]
  readonly exposureKind: ExposureKind
  /** @default 'equal' */
  readonly weighting?: FilmWeighting
  /** @default 0.95 */
  readonly confidenceLevel?: number
}

const refuse = (reason: WorkingCurveRefusal['reason'], detail: string): WorkingCurveRefusal => ({ kind: 'refused', reason, detail })

function weightOf(film: Film, weighting: FilmWeighting): number {
  if (weighting === 'equal') return 1
  if (weighting === 'proportional') return 1 / film.depthMicrometres ** 2
  return 1 / (film.standardUncertaintyMicrometres ?? 1) ** 2
}

/**
 * Fits the working curve: cured depth = Dp · (ln E − ln Ec).
 *
 * Straight-line least squares on ln exposure with t and Fieller intervals: 94 to 95.5 % coverage from four exposures on
 * (`npm run simulate`). Repeated readings of one film are averaged first. Films that did not form or were lost do not
 * enter as zeros, nor do films measured at or below zero; they are listed, and `fitCensoredWorkingCurve` uses them.
 *
 * Source: P. F. Jacobs, Rapid Prototyping & Manufacturing (SME, 1992), the working-curve equation, from memory.
 *
 * @param options.readings - exposures in seconds or mJ/cm², depths in µm
 * @returns `refused` with a reason where the readings cannot tell a curve
 * @throws {StatsError} `exposure-out-of-range`, `depth-out-of-range`, `uncertainty-out-of-range`, `level-out-of-range`
 * @example
 * const outcome = fitWorkingCurve({ readings, exposureKind: 'seconds' })
 * if (outcome.kind === 'fitted') outcome.penetrationDepthMicrometres.interval
 */
export function fitWorkingCurve(options: WorkingCurveOptions): WorkingCurveOutcome {
  const { readings, exposureKind, weighting = 'equal', confidenceLevel = 0.95 } = options
  if (!(confidenceLevel > 0 && confidenceLevel < 1)) {
    throw new StatsError('level-out-of-range', `confidenceLevel must be inside (0, 1), got ${confidenceLevel}`)
  }
  const { films, ...leftOut } = collectFilms(readings)
  const first = films[0]
  if (first === undefined) return refuse('no-films', 'No film is measured yet. Measure films at three or more exposures.')
  if (films.length === 1) return refuse('one-film', 'One film makes no curve. Measure films at three or more exposures.')
  // A difference in the last digits of a typed exposure is no second exposure.
  if (films.every(film => Math.abs(film.logExposure - first.logExposure) < 1e-9)) {
    return refuse('one-exposure', 'All films have one exposure. A curve needs at least two, better six.')
  }
  if (weighting === 'stated' && films.some(film => film.standardUncertaintyMicrometres === null)) {
    return refuse('uncertainty-missing', 'Weighting by stated uncertainty needs an uncertainty for each film.')
  }
  const x = films.map(film => film.logExposure)
  const y = films.map(film => film.depthMicrometres)
  const weights = films.map(film => weightOf(film, weighting))
  const line = fitStraightLine(weighting === 'equal' ? { x, y } : { x, y, weights })
  // Beyond e^±600 the critical exposure leaves the range of numbers: such a slope is rounding, not a curve.
  if (!(line.slope > 0) || Math.abs(line.meanX - line.meanY / line.slope) > 600) {
    return refuse('slope-not-positive', 'The films do not get thicker with exposure. Check that exposures and thicknesses stand in the right rows.')
  }
  return assemble({ films, weights, line, exposureKind, weighting, confidenceLevel, ...leftOut })
}

function assemble(parts: {
  films: readonly Film[]
  weights: readonly number[]
  line: StraightLine
  exposureKind: ExposureKind
  weighting: FilmWeighting
  confidenceLevel: number
  excludedIndexes: readonly number[]
  censoredIndexes: readonly number[]
  notAboveZeroIndexes: readonly number[]
}): WorkingCurveFit {
  const { films, weights, line, confidenceLevel } = parts
  const { slope, meanX, meanY, degreesOfFreedom } = line
  const told = degreesOfFreedom > 0
  const depths = films.map(film => film.depthMicrometres)
  const exposures = films.map(film => film.exposure)
  const depthMax = greatest(depths)
  // Films that lie on a line to the last digits leave rounding, which is no scatter to test anything with.
  const rounding = line.sumWeights * (1e-13 * depthMax) ** 2
  const residualSumOfSquares = line.residualSumOfSquares > rounding ? line.residualSumOfSquares : 0
  const variance = told ? residualSumOfSquares / degreesOfFreedom : 0
  const quantile = told ? tQuantile(0.5 + confidenceLevel / 2, degreesOfFreedom) : 0
  const slopeVariance = variance / line.sumSquaresX
  const meanVariance = variance / line.sumWeights
  const interceptVariance = meanVariance + meanX * meanX * slopeVariance
  const symmetric = (value: number, standardError: number): Interval =>
    told ? { kind: 'finite', lower: value - quantile * standardError, upper: value + quantile * standardError } : { kind: 'unbounded' }
  const estimate = (value: number, standardError: number) => ({
    value,
    standardError: told ? standardError : Infinity,
    interval: symmetric(value, standardError),
  })

  const criticalValue = Math.exp(meanX - meanY / slope)
  const logVariance = (meanVariance + (meanY / slope) ** 2 * slopeVariance) / slope ** 2
  const criticalExposure = {
    value: criticalValue,
    standardError: told ? criticalValue * Math.sqrt(logVariance) : Infinity,
    interval: told
      ? exponentiate(fieller({ numerator: -meanY, denominator: slope, numeratorVariance: meanVariance, denominatorVariance: slopeVariance, covariance: 0, quantile }), meanX)
      : ({ kind: 'unbounded' } as const),
  }

  const points: FilmPoint[] = films.map((film, i) => {
    const residual = line.residuals[i] ?? 0
    const leverage = line.leverages[i] ?? 0
    const weight = weights[i] ?? 1
    const free = 1 - leverage
    // With the film left out, the residual variance has one degree of freedom less. Where nothing is left but rounding, the
    // floor keeps the residual a (huge) number.
    const varianceWithout = degreesOfFreedom > 1 && free > 1e-12
      ? Math.max(1e-11 * residualSumOfSquares, residualSumOfSquares - (weight * residual * residual) / free) / (degreesOfFreedom - 1)
      : 0
    return {
      exposure: film.exposure,
      depthMicrometres: film.depthMicrometres,
      readingCount: film.readingIndexes.length,
      readingIds: film.readingIds,
      readingIndexes: film.readingIndexes,
      weight,
      residualMicrometres: residual,
      leverage,
      cooksDistance: variance > 0 && free > 1e-12 ? (weight * residual * residual * leverage) / (2 * variance * free * free) : 0,
      studentisedResidual: varianceWithout > 0 ? (residual * Math.sqrt(weight)) / Math.sqrt(varianceWithout * free) : null,
    }
  })
  const fit: WorkingCurveFit = {
    kind: 'fitted',
    exposureKind: parts.exposureKind,
    weighting: parts.weighting,
    confidenceLevel,
    interceptMicrometres: estimate(line.intercept, Math.sqrt(interceptVariance)),
    penetrationDepthMicrometres: estimate(slope, Math.sqrt(slopeVariance)),
    criticalExposure,
    covariance: [[interceptVariance, -meanX * slopeVariance], [-meanX * slopeVariance, slopeVariance]],
    residualStandardDeviation: Math.sqrt(variance),
    degreesOfFreedom,
    rSquared: line.totalSumOfSquares > 0 ? 1 - line.residualSumOfSquares / line.totalSumOfSquares : 1,
    filmCount: films.length,
    levelCount: new Set(exposures).size,
    points,
    residuals: line.residuals,
    leverages: line.leverages,
    cooksDistances: points.map(point => point.cooksDistance),
    measuredRange: {
      depthMicrometresMin: least(depths),
      depthMicrometresMax: depthMax,
      exposureMin: least(exposures),
      exposureMax: greatest(exposures),
    },
    excludedIndexes: parts.excludedIndexes,
    censoredIndexes: parts.censoredIndexes,
    notAboveZeroIndexes: parts.notAboveZeroIndexes,
    checks: { curvature: null, lackOfFit: null },
    findings: [],
    centre: { meanLogExposure: meanX, meanDepthMicrometres: meanY, sumSquaresLogExposure: line.sumSquaresX, sumWeights: line.sumWeights },
  }
  const checked = variance > 0 ? { ...fit, checks: checksOf(fit, { x: films.map(film => film.logExposure), y: depths, weights, residualSumOfSquares }) } : fit
  return { ...checked, findings: filmFindings(checked) }
}

function checksOf(
  fit: WorkingCurveFit,
  data: { x: readonly number[]; y: readonly number[]; weights: readonly number[]; residualSumOfSquares: number },
): WorkingCurveFit['checks'] {
  return { curvature: curvatureOf(fit), lackOfFit: fit.filmCount === fit.levelCount ? null : lackOfFit({ ...data, parameters: 2 }) }
}

// Spreading 100,000 values into Math.min overflows the stack.
const least = (values: readonly number[]): number => values.reduce((a, b) => (b < a ? b : a), Infinity)
const greatest = (values: readonly number[]): number => values.reduce((a, b) => (b > a ? b : a), -Infinity)
