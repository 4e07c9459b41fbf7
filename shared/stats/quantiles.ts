import fCdf from '@stdlib/stats-base-dists-f-cdf'
import fQuantileOf from '@stdlib/stats-base-dists-f-quantile'
import chiSquareQuantileOf from '@stdlib/stats-base-dists-chisquare-quantile'
import normalCdf from '@stdlib/stats-base-dists-normal-cdf'
import normalQuantileOf from '@stdlib/stats-base-dists-normal-quantile'
import tCdf from '@stdlib/stats-base-dists-t-cdf'
import tQuantileOf from '@stdlib/stats-base-dists-t-quantile'
import { StatsError } from './types.ts'

/** A fit asks for the same quantile many times; keyed by probability and degrees of freedom. */
const kept = new Map<string, number>()

let lastT = { probability: 0, degreesOfFreedom: 0, value: 0 }

function once(key: string, compute: () => number): number {
  let value = kept.get(key)
  if (value === undefined) {
    value = compute()
    if (kept.size > 5000) kept.clear()
    kept.set(key, value)
  }
  return value
}

function checkProbability(probability: number): void {
  if (!(probability > 0 && probability < 1)) {
    throw new StatsError('probability-out-of-range', `probability must be inside (0, 1), got ${probability}`)
  }
}

function checkDegrees(degreesOfFreedom: number): void {
  if (!(degreesOfFreedom > 0)) throw new StatsError('degrees-out-of-range', `degrees of freedom must be above 0, got ${degreesOfFreedom}`)
}

/**
 * Quantile of the standard normal distribution.
 *
 * @example
 * normalQuantile(0.975) // => 1.959963984540054
 */
export function normalQuantile(probability: number): number {
  checkProbability(probability)
  return once(`z${probability}`, () => {
    const z = normalQuantileOf(probability, 0, 1)
    // The library's value has seven digits at 1e-12; one step of Halley on the tail gives the rest.
    const excess = z < 0 ? normalCdf(z, 0, 1) - probability : 1 - probability - normalCdf(-z, 0, 1)
    const newton = (excess * Math.sqrt(2 * Math.PI)) / Math.exp(-(z * z) / 2)
    return z - newton / (1 + (z * newton) / 2)
  })
}

/**
 * Quantile of Student's t distribution.
 *
 * @example
 * tQuantile(0.975, 4) // => 2.7764451051977987
 */
export function tQuantile(probability: number, degreesOfFreedom: number): number {
  // One fit asks for one and the same value a dozen times: faster than to make a key each time.
  if (probability === lastT.probability && degreesOfFreedom === lastT.degreesOfFreedom) return lastT.value
  checkProbability(probability)
  checkDegrees(degreesOfFreedom)
  const value = once(`t${probability}|${degreesOfFreedom}`, () => tQuantileOf(probability, degreesOfFreedom))
  lastT = { probability, degreesOfFreedom, value }
  return value
}

/** Quantile of the chi-square distribution. */
export function chiSquareQuantile(probability: number, degreesOfFreedom: number): number {
  checkProbability(probability)
  checkDegrees(degreesOfFreedom)
  return once(`c${probability}|${degreesOfFreedom}`, () => chiSquareQuantileOf(probability, degreesOfFreedom))
}

/** Quantile of the F distribution. */
export function fQuantile(probability: number, numerator: number, denominator: number): number {
  checkProbability(probability)
  return once(`f${probability}|${numerator}|${denominator}`, () => fQuantileOf(probability, numerator, denominator))
}

/** Chance of a standard normal above z; exact in the tail, since it is the other tail of the mirrored value. */
export function normalUpperTail(z: number): number {
  return normalCdf(-z, 0, 1)
}

/** Chance of a t value further from zero than this, both sides. */
export function tTwoSidedTail(t: number, degreesOfFreedom: number): number {
  checkDegrees(degreesOfFreedom)
  return Math.min(1, 2 * tCdf(-Math.abs(t), degreesOfFreedom))
}

/** Chance of an F value above this: the lower tail of its inverse, never 1 minus a number near 1. */
export function fUpperTail(f: number, numerator: number, denominator: number): number {
  checkDegrees(numerator)
  checkDegrees(denominator)
  if (f <= 0) return 1
  if (f === Infinity) return 0
  return fCdf(1 / f, denominator, numerator)
}

/**
 * Chance of a chi-square value above this, for a whole number of degrees of freedom.
 *
 * A sum of positive terms (Abramowitz & Stegun 26.4.4, 26.4.5), so the tail keeps its digits.
 */
export function chiSquareUpperTail(value: number, degreesOfFreedom: number): number {
  if (!Number.isInteger(degreesOfFreedom) || degreesOfFreedom < 1) throw new StatsError('degrees-out-of-range', `degrees of freedom must be a whole number above 0, got ${degreesOfFreedom}`)
  if (value <= 0) return 1
  const even = degreesOfFreedom % 2 === 0
  let tail = even ? Math.exp(-value / 2) : 2 * normalUpperTail(Math.sqrt(value))
  let term = even ? Math.exp(-value / 2) : 2 * Math.sqrt(value) * Math.exp(-value / 2 - 0.9189385332046727)
  for (let k = even ? 2 : 1; k < degreesOfFreedom; k += 2) {
    if (even) term *= value / k
    else if (k > 1) term *= value / k
    tail += term
  }
  return Math.min(1, tail)
}
