import { tQuantile } from '../stats/quantiles.ts'
import { StatsError, type Interval } from '../stats/types.ts'
import { profileDeadTime, type DeadTimeProfile } from './dead-time-profile.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import type { DeadTimeFit, FilmModelFit, ModelDepth, ModelExposureOutcome } from './film-model-types.ts'
import { logAttenuation, twoLineDepth, twoLineGradient, twoLineParts } from './two-line-depth.ts'

/** Mean depth on ln exposure and its derivatives by the coefficients. */
function curveOf(fit: FilmModelFit): { depth: (x: number) => number; gradient: (x: number) => readonly number[] } {
  if (fit.model === 'quadratic') {
    const [c0 = 0, c1 = 0, c2 = 0] = fit.coefficients
    return {
      depth: x => c0 + (x - fit.meanLogExposure) * (c1 + c2 * (x - fit.meanLogExposure)),
      gradient: x => [1, x - fit.meanLogExposure, (x - fit.meanLogExposure) ** 2],
    }
  }
  if (fit.model === 'two-line') {
    const parts = twoLineParts(fit.coefficients)
    return { depth: x => twoLineDepth(parts, x), gradient: x => twoLineGradient(fit.coefficients, x) }
  }
  const [intercept = 0, slope = 0, deadTime = 0] = fit.coefficients
  return {
    depth: x => intercept + slope * Math.log(Math.exp(x) - deadTime),
    gradient: x => [1, Math.log(Math.exp(x) - deadTime), -slope / (Math.exp(x) - deadTime)],
  }
}

/** ln exposure of a depth, or null where the curve turns before it gets there. */
function logExposureOf(fit: FilmModelFit, depth: number): number | null {
  if (fit.model === 'two-line') {
    const parts = twoLineParts(fit.coefficients)
    return parts.logCritical - logAttenuation(parts, depth)
  }
  if (fit.model === 'dead-time') {
    const exposure = fit.deadTime.value + fit.criticalExposure.value * Math.exp(depth / fit.penetrationDepthMicrometres.value)
    return exposure > 0 ? Math.log(exposure) : null
  }
  const [c0 = 0, c1 = 0, c2 = 0] = fit.coefficients
  const discriminant = c1 * c1 - 4 * c2 * (c0 - depth)
  if (discriminant < 0) return null
  // The rising branch; written so that it is the straight line's answer as the bend goes to zero.
  const root = (2 * (depth - c0)) / (c1 + Math.sqrt(discriminant))
  return Number.isFinite(root) ? fit.meanLogExposure + root : null
}

function profileOf(fit: DeadTimeFit): DeadTimeProfile {
  const quantile = tQuantile(0.5 + fit.confidenceLevel / 2, fit.degreesOfFreedom)
  return profileDeadTime(fit.levels, {
    deadTime: fit.deadTime.value,
    allowance: (quantile * fit.residualStandardDeviation) ** 2,
  })
}

/** Half the width of the confidence band of the mean depth at ln exposure. */
function halfBand(fit: FilmModelFit, gradient: readonly number[]): number {
  let variance = 0
  for (const [i, a] of gradient.entries()) for (const [j, b] of gradient.entries()) variance += a * b * (fit.covariance[i]?.[j] ?? 0)
  return tQuantile(0.5 + fit.confidenceLevel / 2, fit.degreesOfFreedom) * Math.sqrt(Math.max(0, variance))
}

/**
 * Mean cured depth by one of the other curves, with its confidence interval.
 *
 * @throws {StatsError} `exposure-out-of-range`
 */
export function modelDepthAt(fit: FilmModelFit, exposure: number): ModelDepth {
  if (!(exposure > 0 && Number.isFinite(exposure))) throw new StatsError('exposure-out-of-range', `exposure must be above zero, got ${exposure}`)
  const { depth, gradient } = curveOf(fit)
  const x = Math.log(exposure)
  const middle = depth(x)
  const interval = (): Interval => {
    if (fit.degreesOfFreedom < 1) return { kind: 'unbounded' }
    if (fit.model === 'dead-time') return profileOf(fit).depthAt(exposure)
    const half = halfBand(fit, gradient(x))
    return { kind: 'finite', lower: middle - half, upper: middle + half }
  }
  return {
    exposure,
    depthMicrometres: middle,
    confidenceInterval: interval(),
    extrapolated: exposure < fit.measuredRange.exposureMin || exposure > fit.measuredRange.exposureMax,
  }
}

/** How far an end is looked for, in ln exposure: a factor of 20 either way. */
const reach = 3

/**
 * The exposure that cures to a depth by one of the other curves.
 *
 * The interval holds every exposure whose confidence band covers the depth, which for the straight line is Fieller's;
 * for the dead-time curve it is the profile's.
 *
 * @returns refused where the curve turns before it reaches the depth
 * @throws {StatsError} `depth-out-of-range`
 */
export function modelExposureForDepth(fit: FilmModelFit, depthMicrometres: number): ModelExposureOutcome {
  if (!Number.isFinite(depthMicrometres)) throw new StatsError('depth-out-of-range', `depth must be a finite number, got ${depthMicrometres}`)
  const best = logExposureOf(fit, depthMicrometres)
  if (best === null) {
    return { kind: 'refused', reason: 'depth-not-reached', detail: `This curve turns before it reaches ${depthMicrometres} µm; it does not hold there.` }
  }
  const interval = (): Interval => {
    if (fit.degreesOfFreedom < 1) return { kind: 'unbounded' }
    if (fit.model === 'dead-time') return profileOf(fit).exposureForDepth(depthMicrometres)
    const { depth, gradient } = curveOf(fit)
    const outside = (x: number): boolean => Math.abs(depth(x) - depthMicrometres) > halfBand(fit, gradient(x))
    const [lower, upper] = [firstOutside(outside, best, -reach), firstOutside(outside, best, reach)]
    return lower === null || upper === null ? { kind: 'unbounded' } : exponentiate({ kind: 'finite', lower, upper })
  }
  const { depthMicrometresMin, depthMicrometresMax } = fit.measuredRange
  return {
    kind: 'answered',
    depthMicrometres,
    value: Math.exp(best),
    meanInterval: interval(),
    extrapolated: depthMicrometres < depthMicrometresMin || depthMicrometres > depthMicrometresMax,
  }
}

function firstOutside(outside: (x: number) => boolean, start: number, way: number): number | null {
  const steps = 300
  let inside = start
  for (let i = 1; i <= steps; i++) {
    let beyond = start + (way * i) / steps
    if (!outside(beyond)) {
      inside = beyond
      continue
    }
    for (let k = 0; k < 50; k++) {
      const middle = (inside + beyond) / 2
      if (outside(middle)) beyond = middle
      else inside = middle
    }
    return inside
  }
  return null
}
