import { fitNonlinear } from '../stats/fit-nonlinear.ts'
import { tQuantile } from '../stats/quantiles.ts'
import { lineAtDeadTime, profileDeadTime } from './dead-time-profile.ts'
import type { DeadTimeFit, FilmModelRefusal } from './film-model-types.ts'
import type { WorkingCurveOptions } from './fit-working-curve.ts'
import { prepareModelData } from './model-data.ts'

/** Dead times to start from, as shares of the shortest exposure. */
const startShares = [-10, -3, -1, 0, 0.3, 0.6, 0.85, 0.97]

/**
 * Fits depth = Dp ln((t − t0)/tc): a source that comes up late, a shutter, an induction time.
 *
 * The optimum and its standard errors come from `fitNonlinear`, the intervals from the profile over t0. Needs films at
 * four exposures; says much only with films near the thinnest that hold.
 *
 * @returns refused where the films cannot tell a dead time from a straight line in t
 * @throws {StatsError} as `fitWorkingCurve`
 * @example
 * const outcome = fitDeadTimeCurve({ readings, exposureKind: 'seconds' })
 * if (outcome.kind === 'fitted') outcome.deadTime.interval
 */
export function fitDeadTimeCurve(options: WorkingCurveOptions): DeadTimeFit | FilmModelRefusal {
  const data = prepareModelData(options)
  if (data.kind === 'refused') return data
  const { line, points, levels, pureError } = data
  const shortest = line.measuredRange.exposureMin
  const starts = startShares.flatMap(share => {
    const start = lineAtDeadTime(levels, share * shortest)
    return start !== null && start.slope > 0 ? [[start.meanY - start.slope * start.meanX, start.slope, share * shortest]] : []
  })
  if (starts.length === 0) return { kind: 'refused', reason: 'not-converged', detail: 'No dead time gives a curve that rises with exposure.' }
  const squaresAt = (start: readonly number[]) => lineAtDeadTime(levels, start[2] ?? 0)?.residualSumOfSquares ?? Infinity
  const closest = [...starts].sort((a, b) => squaresAt(a) - squaresAt(b)).slice(0, 2)
  const outcome = fitNonlinear({
    x: levels.map(level => level.exposure),
    y: levels.map(level => level.depthMicrometres),
    weights: levels.map(level => level.weight),
    pureError,
    model: ([intercept = 0, slope = 0, deadTime = 0]) => t => intercept + slope * Math.log(t - deadTime),
    jacobian: ([, slope = 0, deadTime = 0]) => t => [1, Math.log(t - deadTime), -slope / (t - deadTime)],
    starts: closest,
  })
  if (outcome.kind === 'refused') return outcome
  const [intercept = 0, slope = 0, deadTime = 0] = outcome.parameters
  if (!(slope > 0)) return { kind: 'refused', reason: 'slope-not-positive', detail: 'The films do not get thicker with exposure.' }
  const { confidenceLevel } = line
  const degrees = outcome.degreesOfFreedom
  const told = degrees > 0
  const allowance = told ? (tQuantile(0.5 + confidenceLevel / 2, degrees) * outcome.residualStandardDeviation) ** 2 : Infinity
  const profile = told ? profileDeadTime(levels, { deadTime, allowance }) : null
  const open = { kind: 'unbounded' } as const
  const criticalExposure = Math.exp(-intercept / slope)
  const covarianceOf = (i: number, j: number): number => outcome.covariance[i]?.[j] ?? 0
  // d ln tc = −d intercept / slope + intercept d slope / slope²
  const [byIntercept, bySlope] = [-1 / slope, intercept / slope ** 2]
  const logVariance = byIntercept ** 2 * covarianceOf(0, 0) + 2 * byIntercept * bySlope * covarianceOf(0, 1) + bySlope ** 2 * covarianceOf(1, 1)
  return {
    kind: 'fitted',
    model: 'dead-time',
    exposureKind: line.exposureKind,
    confidenceLevel,
    points,
    levels,
    coefficients: outcome.parameters,
    covariance: outcome.covariance,
    residuals: points.map(point => point.depthMicrometres - intercept - slope * Math.log(point.exposure - deadTime)),
    residualSumOfSquares: outcome.residualSumOfSquares,
    degreesOfFreedom: degrees,
    residualStandardDeviation: outcome.residualStandardDeviation,
    measuredRange: line.measuredRange,
    penetrationDepthMicrometres: { value: slope, standardError: outcome.standardErrors[1] ?? Infinity, interval: profile?.penetrationDepth ?? open },
    criticalExposure: {
      value: criticalExposure,
      standardError: told ? criticalExposure * Math.sqrt(Math.max(0, logVariance)) : Infinity,
      interval: profile?.criticalExposure ?? open,
    },
    deadTime: { value: deadTime, standardError: outcome.standardErrors[2] ?? Infinity, interval: profile?.deadTime ?? open },
  }
}
