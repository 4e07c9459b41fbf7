import { binomialObjective, fitBinomialGlm } from '../stats/binomial-glm.ts'
import { linkAt } from '../stats/binomial-link.ts'
import { exponentiate } from '../stats/exponentiate.ts'
import { fieller } from '../stats/fieller.ts'
import { profileInterval } from '../stats/profile-interval.ts'
import { chiSquareQuantile, normalQuantile, tQuantile } from '../stats/quantiles.ts'
import { StatsError, type Interval } from '../stats/types.ts'
import type { ResponseFit } from './fit-response.ts'

/** A profile may be open on one side: then only the other end is a number. */
export type SidedInterval = Interval | { readonly kind: 'one-sided'; readonly lower: number | null; readonly upper: number | null }

export interface ExposureAtShare {
  /** Exposure at which the share passes, in the unit of the tallies. */
  readonly value: number
  /** Of ln(value), by the delta method. */
  readonly standardErrorOfLog: number
  readonly delta: Interval
  readonly fieller: Interval
  /** By the likelihood (penalised, where the fit is Firth's), exact to the last digits. */
  readonly profile: SidedInterval
  /** With the dispersion as a scale and t quantiles; equal to delta and Fieller where the dispersion is 1 or less. */
  readonly quasi: { readonly delta: Interval; readonly fieller: Interval }
}

/**
 * The exposure at which a share of the features passes, with its intervals.
 *
 * All are made on ln exposure and turned back. For the record and for checks: Wald and Fieller intervals fail on the
 * short ladders of a shop; what a person acts on comes from `edgePosterior`.
 *
 * Sources: Finney, Probit Analysis (1971); Fieller, JRSS B 16 (1954) 175; Heinze & Schemper, Stat. Med. 21 (2002) 2409.
 *
 * @param share - strictly between 0 and 1
 * @param options.sizeMicrometres - needed where the fit has a slope on size
 * @throws {StatsError} `share-out-of-range`, `size-needed`
 * @example
 * const outcome = fitResponse({ tallies, kind: 'must-form' })
 * if (outcome.kind === 'fitted') exposureAt(outcome, 0.5).value // seconds at which half of the features form
 */
export function exposureAt(
  fit: ResponseFit,
  share: number,
  options: { readonly confidenceLevel?: number; readonly sizeMicrometres?: number } = {},
): ExposureAtShare {
  if (!(share > 0 && share < 1)) throw new StatsError('share-out-of-range', `share must be inside (0, 1), got ${share}`)
  const { confidenceLevel = 0.95, sizeMicrometres } = options
  const [intercept = 0, slope = 0, sizeSlope] = fit.coefficients
  if (sizeSlope !== undefined && sizeMicrometres === undefined) {
    throw new StatsError('size-needed', 'the response depends on size: say for which size')
  }
  const logSize = sizeSlope === undefined || sizeMicrometres === undefined ? 0 : Math.log(sizeMicrometres)
  const target = linkAt(fit.link, share)
  const x = (target - intercept - (sizeSlope ?? 0) * logSize) / slope

  // Numerator a = target - intercept - size part; the covariance of (a, slope) follows from the coefficients'.
  const v = (i: number, j: number) => fit.covariance[i]?.[j] ?? 0
  const variance = {
    numerator: v(0, 0) + 2 * logSize * v(0, 2) + logSize ** 2 * v(2, 2),
    denominator: v(1, 1),
    covariance: -(v(0, 1) + logSize * v(1, 2)),
  }
  const standardErrorOfLog = Math.sqrt(variance.numerator + x * x * variance.denominator - 2 * x * variance.covariance) / Math.abs(slope)

  const intervals = (scale: number, quantile: number) => ({
    delta: exponentiate({ kind: 'finite', lower: x - quantile * scale * standardErrorOfLog, upper: x + quantile * scale * standardErrorOfLog }),
    fieller: exponentiate(fieller({
      numerator: slope * x,
      denominator: slope,
      numeratorVariance: scale ** 2 * variance.numerator,
      denominatorVariance: scale ** 2 * variance.denominator,
      covariance: scale ** 2 * variance.covariance,
      quantile,
    })),
  })
  const plain = intervals(1, normalQuantile(0.5 + confidenceLevel / 2))
  const overdispersed = fit.dispersion > 1 && fit.degreesOfFreedom > 0
  const quasi = overdispersed
    ? intervals(Math.sqrt(fit.dispersion), tQuantile(0.5 + confidenceLevel / 2, fit.degreesOfFreedom))
    : plain
  return {
    value: Math.exp(x),
    standardErrorOfLog,
    ...plain,
    profile: profileOfExposure(fit, { x, target, logSize, confidenceLevel, step: standardErrorOfLog }),
    quasi,
  }
}

/** Profiles ln exposure at the share: the other coefficients are fitted anew at each trial value. */
function profileOfExposure(
  fit: ResponseFit,
  at: { x: number; target: number; logSize: number; confidenceLevel: number; step: number },
): SidedInterval {
  const withSize = fit.coefficients.length > 2
  let start: readonly number[] = fit.coefficients.slice(1)
  const objectiveAt = (x: number): number => {
    if (fit.method === 'firth' && !withSize) return bestOverSlopes(fit, at.target, x)
    const outcome = fitBinomialGlm(fit.data, {
      link: fit.link,
      method: fit.method,
      within: {
        base: [at.target, 0, 0].slice(0, fit.coefficients.length),
        basis: withSize ? [[-x, 1, 0], [-at.logSize, 0, 1]] : [[-x, 1]],
      },
      start,
    })
    if (outcome.kind === 'refused') return -Infinity
    // The neighbour's answer is the best start for the next trial value.
    start = outcome.free
    return outcome.objective
  }
  const maximum = objectiveAt(at.x)
  const range = fit.data.design.map(row => row[1] ?? 0)
  const ends = profileInterval(objectiveAt, {
    best: at.x,
    maximum,
    drop: chiSquareQuantile(at.confidenceLevel, 1) / 2,
    step: Math.max(at.step / 4, 1e-4),
    reach: 1000 * (Math.max(...range) - Math.min(...range)) + 200 * Math.abs(at.x - (range[0] ?? 0)),
  })
  const lower = ends.lower === null ? null : Math.exp(ends.lower)
  const upper = ends.upper === null ? null : Math.exp(ends.upper)
  if (lower !== null && upper !== null) return { kind: 'finite', lower, upper }
  return lower === null && upper === null ? { kind: 'unbounded' } : { kind: 'one-sided', lower, upper }
}

const goldenShare = (Math.sqrt(5) - 1) / 2

/**
 * Largest penalised likelihood over all slopes when ln exposure at the share is held at x.
 *
 * It is not concave and can have a steep and a flat maximum, so the whole range of slopes is scanned, and each peak is
 * narrowed by golden section.
 */
function bestOverSlopes(fit: ResponseFit, target: number, x: number): number {
  const sign = Math.sign(fit.coefficients[1] ?? 1)
  const value = (logSlope: number): number => {
    const slope = sign * Math.exp(logSlope)
    return binomialObjective(fit.data, fit, [target - slope * x, slope])
  }
  const [first, last, count] = [Math.log(0.001), Math.log(2000), 45]
  const step = (last - first) / (count - 1)
  const grid = Array.from({ length: count }, (_, i) => value(first + i * step))
  let best = -Infinity
  for (const [i, here] of grid.entries()) {
    best = Math.max(best, here)
    if (here >= (grid[i - 1] ?? -Infinity) && here >= (grid[i + 1] ?? -Infinity)) {
      best = Math.max(best, goldenMaximum(value, first + (i - 1) * step, first + (i + 1) * step))
    }
  }
  return best
}

function goldenMaximum(value: (at: number) => number, from: number, to: number): number {
  let [low, high] = [from, to]
  let left = high - goldenShare * (high - low)
  let right = low + goldenShare * (high - low)
  let [atLeft, atRight] = [value(left), value(right)]
  for (let i = 0; i < 45; i++) {
    if (atLeft > atRight) {
      high = right
      right = left
      atRight = atLeft
      left = high - goldenShare * (high - low)
      atLeft = value(left)
    } else {
      low = left
      left = right
      atLeft = atRight
      right = low + goldenShare * (high - low)
      atRight = value(right)
    }
  }
  return Math.max(atLeft, atRight)
}
