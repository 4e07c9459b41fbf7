import normalCdf from '@stdlib/stats-base-dists-normal-cdf'
import normalQuantile from '@stdlib/stats-base-dists-normal-quantile'

export type BinomialLink = 'logit' | 'probit' | 'cloglog'

/** A link at one value of the linear predictor: chances, slope and the two logs that a likelihood needs. */
export interface LinkPoint {
  /** Chance to pass. */
  readonly pass: number
  /** Chance to fail, never formed as 1 - pass: both tails stay exact. */
  readonly fail: number
  /** d pass / d eta. */
  readonly slope: number
  readonly logPass: number
  readonly logFail: number
  /** d ln(working weight) / d eta, where the working weight of one trial is slope² / (pass · fail). */
  readonly logWeightSlope: number
}

/** ln √(2π). */
const logSqrtTwoPi = 0.9189385332046727

function logitPoint(eta: number): LinkPoint {
  const small = Math.exp(-Math.abs(eta))
  const near = 1 / (1 + small)
  const far = small / (1 + small)
  const pass = eta >= 0 ? near : far
  const fail = eta >= 0 ? far : near
  const logNear = -Math.log1p(small)
  const logFar = -Math.abs(eta) + logNear
  return {
    pass,
    fail,
    slope: pass * fail,
    logPass: eta >= 0 ? logNear : logFar,
    logFail: eta >= 0 ? logFar : logNear,
    logWeightSlope: fail - pass,
  }
}

function probitPoint(eta: number): LinkPoint {
  // Beyond 37 standard deviations the tail is no double any more; the likelihood there is flat to the last digit.
  const bounded = Math.max(-37, Math.min(37, eta))
  const pass = normalCdf(bounded, 0, 1)
  const fail = normalCdf(-bounded, 0, 1)
  const slope = Math.exp(-0.5 * bounded * bounded - logSqrtTwoPi)
  return {
    pass,
    fail,
    slope,
    logPass: pass > 0.5 ? Math.log1p(-fail) : Math.log(pass),
    logFail: fail > 0.5 ? Math.log1p(-pass) : Math.log(fail),
    logWeightSlope: -2 * bounded - slope / pass + slope / fail,
  }
}

function cloglogPoint(eta: number): LinkPoint {
  // exp(exp(6.5)) is the last finite double's neighbourhood: beyond it nothing fails.
  const bounded = Math.max(-700, Math.min(6.5, eta))
  const hazard = Math.exp(bounded)
  const pass = -Math.expm1(-hazard)
  const fail = Math.exp(-hazard)
  const slope = Math.exp(bounded - hazard)
  return {
    pass,
    fail,
    slope,
    logPass: Math.log(pass),
    logFail: -hazard,
    logWeightSlope: 2 * (1 - hazard) - slope / pass + hazard,
  }
}

/**
 * Evaluates a binomial link at a linear predictor.
 *
 * @example
 * linkPoint('logit', 0).pass // => 0.5
 */
export function linkPoint(link: BinomialLink, eta: number): LinkPoint {
  if (link === 'logit') return logitPoint(eta)
  return link === 'probit' ? probitPoint(eta) : cloglogPoint(eta)
}

/**
 * The linear predictor at which a share passes: the link itself.
 *
 * @param share - strictly between 0 and 1
 * @example
 * linkAt('logit', 0.9) // => 2.1972245773362196 (ln 9)
 */
export function linkAt(link: BinomialLink, share: number): number {
  if (link === 'logit') return Math.log(share) - Math.log1p(-share)
  if (link === 'probit') return normalQuantile(share, 0, 1)
  return Math.log(-Math.log1p(-share))
}
