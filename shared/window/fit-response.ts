import { fitBinomialGlm, type BinomialData } from '../stats/binomial-glm.ts'
import type { BinomialLink } from '../stats/binomial-link.ts'
import { linkPoint } from '../stats/binomial-link.ts'
import { findSeparation, type Separation } from '../stats/separation.ts'
import { checkTallies } from './check-tallies.ts'
import type { FeatureKind, Tally } from './types.ts'

export interface ResponseFit {
  readonly kind: 'fitted'
  readonly featureKind: FeatureKind
  readonly link: BinomialLink
  readonly method: 'ml' | 'firth'
  /** Intercept, slope on ln exposure, and slope on ln size where sizes differ. */
  readonly coefficients: readonly number[]
  readonly standardErrors: readonly number[]
  /** Inverse expected information, in the order of the coefficients. */
  readonly covariance: readonly (readonly number[])[]
  readonly logLikelihood: number
  readonly deviance: number
  readonly pearson: number
  readonly degreesOfFreedom: number
  /** Pearson chi-square over its degrees of freedom; 1 where there are none. */
  readonly dispersion: number
  readonly separation: Separation
  readonly fitted: readonly number[]
  readonly leverages: readonly number[]
  readonly devianceResiduals: readonly number[]
  readonly pearsonResiduals: readonly number[]
  /** What the fit was made from, in columns [1, ln exposure, ln size]. */
  readonly data: BinomialData
}

export type ResponseOutcome =
  | ResponseFit
  | {
      readonly kind: 'refused'
      readonly reason: 'no-data' | 'one-exposure' | 'separated' | 'singular' | 'not-converged'
      readonly detail: string
      readonly separation: Separation | null
    }

/** Half the deviance of one row: 0 ln 0 is 0. */
function halfDeviance(passed: number, total: number, pass: number, fail: number): number {
  const part = (count: number, expected: number) => (count === 0 ? 0 : count * Math.log(count / expected))
  return part(passed, total * pass) + part(total - passed, total * fail)
}

/**
 * Fits a pass/fail response to log exposure (and log size, where tiers differ) as a binomial GLM.
 *
 * For the record and for checks: what a person acts on comes from `edgePosterior`. Separated data have no
 * maximum-likelihood fit and are refused by name; `method: 'firth'` answers them.
 *
 * Sources: Finney, Probit Analysis (1971); Firth, Biometrika 80 (1993) 27.
 *
 * @throws {StatsError} when a tally is not usable (negative, more passed than judged, exposure not above zero)
 * @example
 * fitResponse({ tallies: [{ exposure: 8, passed: 2, total: 10 }, { exposure: 10, passed: 7, total: 10 }], kind: 'must-form' })
 */
export function fitResponse(options: {
  readonly tallies: readonly Tally[]
  readonly kind: FeatureKind
  readonly link?: BinomialLink
  readonly method?: 'ml' | 'firth'
}): ResponseOutcome {
  const { kind: featureKind, link = 'logit', method = 'ml' } = options
  const tallies = checkTallies(options.tallies)
  if (tallies.length === 0) {
    return { kind: 'refused', reason: 'no-data', detail: 'No feature was judged yet.', separation: null }
  }
  const x = tallies.map(tally => Math.log(tally.exposure))
  if (x.every(value => value === x[0])) {
    return { kind: 'refused', reason: 'one-exposure', detail: 'All prints have one exposure: a curve needs at least two.', separation: null }
  }
  const sizes = tallies.map(tally => (tally.sizeMicrometres === undefined ? 0 : Math.log(tally.sizeMicrometres)))
  const withSize = sizes.some(value => value !== sizes[0])
  const design = tallies.map((_, i) => (withSize ? [1, x[i] ?? 0, sizes[i] ?? 0] : [1, x[i] ?? 0]))
  const data: BinomialData = { design, passed: tallies.map(t => t.passed), total: tallies.map(t => t.total) }

  const separation = findSeparation(data)
  if (method === 'ml' && separation !== 'overlap') {
    return { kind: 'refused', reason: 'separated', separation, detail: 'Passes and fails are split by an exposure without overlap: the steepest curve always fits better, so maximum likelihood has no answer.' }
  }
  // Centred columns keep the solution accurate where exposures are all alike; the coefficients are turned back below.
  const means = design[0]?.map((_, j) => (j === 0 ? 0 : design.reduce((sum, row) => sum + (row[j] ?? 0), 0) / design.length)) ?? []
  const centred = { ...data, design: design.map(row => row.map((value, j) => value - (means[j] ?? 0))) }
  const outcome = fitBinomialGlm(centred, { link, method })
  if (outcome.kind === 'refused') return { ...outcome, separation }

  // intercept = centred intercept - sum of slope times mean; the same linear map turns the covariance.
  const turn = means.map((_, i) => means.map((mean, j) => (i === j ? 1 : i === 0 ? -mean : 0)))
  const dot = (row: readonly number[], column: readonly number[]) => row.reduce((sum, value, k) => sum + value * (column[k] ?? 0), 0)
  const coefficients = turn.map(row => dot(row, outcome.coefficients))
  const half = turn.map(row => outcome.covariance.map(column => dot(row, column)))
  const covariance = half.map(row => turn.map(other => dot(row, other)))

  const rows = tallies.map((tally, i) => {
    const eta = dot(design[i] ?? [], coefficients)
    const { pass, fail } = linkPoint(link, eta)
    const sign = tally.passed >= tally.total * pass ? 1 : -1
    return {
      deviance: sign * Math.sqrt(Math.max(0, 2 * halfDeviance(tally.passed, tally.total, pass, fail))),
      pearson: (tally.passed - tally.total * pass) / Math.sqrt(tally.total * pass * fail),
    }
  })
  const pearson = rows.reduce((sum, row) => sum + row.pearson ** 2, 0)
  const degreesOfFreedom = tallies.length - coefficients.length
  return {
    kind: 'fitted',
    featureKind,
    link,
    method,
    coefficients,
    standardErrors: covariance.map((row, i) => Math.sqrt(row[i] ?? 0)),
    covariance,
    logLikelihood: outcome.logLikelihood,
    deviance: rows.reduce((sum, row) => sum + row.deviance ** 2, 0),
    pearson,
    degreesOfFreedom,
    dispersion: degreesOfFreedom > 0 ? pearson / degreesOfFreedom : 1,
    separation,
    fitted: outcome.fitted,
    leverages: outcome.leverages,
    devianceResiduals: rows.map(row => row.deviance),
    pearsonResiduals: rows.map(row => row.pearson),
    data,
  }
}
