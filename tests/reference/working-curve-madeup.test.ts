import { describe, expect, it } from 'vitest'
import {
  curvatureOf, exposureForDepth, fitQuadraticCurve, fitWorkingCurve, type FilmReading, type Interval,
} from '#shared/film/index.ts'
import { fieller, lackOfFit } from '#shared/stats/index.ts'
import { digitsOfAgreement } from '#tests/helpers/digits.ts'
import { asList, readReference } from '#tests/helpers/reference.ts'

// Source: R 4.2.2, lm, confint, anova and Fieller in closed form on made-up working curves; fixtures/reference/README.md.
interface Case {
  readonly id: string
  readonly E: readonly number[]
  readonly Cd: readonly number[]
  readonly weights: readonly number[] | null
  readonly targets: number | readonly number[]
}
interface Set {
  readonly type: string
  readonly lnE: readonly [number, number]
}
interface Inverse {
  readonly Cd: number
  readonly E: number
  readonly fieller_mean: Set
  readonly fieller_single_new_obs_unitweight: Set
}
interface Expected {
  readonly b0: number
  readonly b1: number
  readonly se_b0: number
  readonly se_b1: number
  readonly cov: readonly (readonly number[])[]
  readonly sigma: number
  readonly df: number
  readonly r2: number
  readonly Dp_ci: readonly [number, number]
  readonly Ec: number
  readonly se_Ec_delta: number
  readonly Ec_fieller: { readonly type: string; readonly Ec: readonly [number, number] }
  readonly residuals: readonly number[]
  readonly hat: readonly number[]
  readonly rstudent: readonly number[]
  readonly cooks: readonly number[]
  readonly lack_of_fit: { readonly ss_pure_error: number; readonly df_pure_error: number; readonly df_lof: number; readonly F: number; readonly p: number } | null
  readonly inverse: readonly Inverse[]
  readonly quadratic: { readonly coef: readonly number[]; readonly se: readonly number[]; readonly p_quad: number; readonly F: number } | null
}

const reference = readReference<readonly Case[], readonly Expected[]>('workingcurve_madeup')
const cases = reference.data.flatMap((data, i) => {
  const expected = reference.expected[i]
  return expected === undefined ? [] : [{ id: data.id, data, expected }]
})

function fitOf(data: Case) {
  const readings: FilmReading[] = data.E.map((exposure, i) => ({
    exposure,
    depthMicrometres: data.Cd[i] ?? Number.NaN,
    state: 'measured',
    ...(data.weights === null ? {} : { standardUncertaintyMicrometres: 1 / Math.sqrt(data.weights[i] ?? Number.NaN) }),
  }))
  const options = { readings, exposureKind: 'mJ/cm2', weighting: data.weights === null ? 'equal' : 'stated' } as const
  const outcome = fitWorkingCurve(options)
  if (outcome.kind === 'refused') throw new Error(outcome.detail)
  return { fit: outcome, options }
}

function expectEnds(interval: Interval, ends: readonly number[], digits = 8): void {
  if (interval.kind !== 'finite') throw new Error(`expected a finite interval, got ${interval.kind}`)
  expect(digitsOfAgreement(interval.lower, ends[0] ?? Number.NaN)).toBeGreaterThan(digits)
  expect(digitsOfAgreement(interval.upper, ends[1] ?? Number.NaN)).toBeGreaterThan(digits)
}

describe.each(cases)('made-up working curve $id, as R fits it', ({ data, expected }) => {
  const { fit, options } = fitOf(data)

  it('has R\'s coefficients, standard errors, covariance, scatter and R²', () => {
    expect(digitsOfAgreement(fit.interceptMicrometres.value, expected.b0)).toBeGreaterThan(10)
    expect(digitsOfAgreement(fit.penetrationDepthMicrometres.value, expected.b1)).toBeGreaterThan(10)
    expect(digitsOfAgreement(fit.interceptMicrometres.standardError, expected.se_b0)).toBeGreaterThan(9)
    expect(digitsOfAgreement(fit.penetrationDepthMicrometres.standardError, expected.se_b1)).toBeGreaterThan(9)
    for (const [i, j] of [[0, 0], [0, 1], [1, 0], [1, 1]] as const) {
      expect(digitsOfAgreement(fit.covariance[i][j], expected.cov[i]?.[j] ?? Number.NaN)).toBeGreaterThan(9)
    }
    expect(digitsOfAgreement(fit.residualStandardDeviation, expected.sigma)).toBeGreaterThan(9)
    expect(digitsOfAgreement(fit.rSquared, expected.r2)).toBeGreaterThan(10)
    expect(fit.degreesOfFreedom).toBe(expected.df)
  })

  it('has R\'s interval of Dp and Fieller\'s of Ec', () => {
    expectEnds(fit.penetrationDepthMicrometres.interval, expected.Dp_ci)
    expect(digitsOfAgreement(fit.criticalExposure.value, expected.Ec)).toBeGreaterThan(10)
    expect(digitsOfAgreement(fit.criticalExposure.standardError, expected.se_Ec_delta)).toBeGreaterThan(8)
    expect(expected.Ec_fieller.type).toBe('finite')
    expectEnds(fit.criticalExposure.interval, expected.Ec_fieller.Ec)
  })

  it('has R\'s residuals, leverages, Cook\'s distances and studentised residuals', () => {
    for (const [i, point] of fit.points.entries()) {
      expect(Math.abs(point.residualMicrometres - (expected.residuals[i] ?? Number.NaN))).toBeLessThan(1e-9 * expected.sigma * Math.sqrt(expected.df) + 1e-11)
      expect(digitsOfAgreement(point.leverage, expected.hat[i] ?? Number.NaN)).toBeGreaterThan(10)
      expect(Math.abs(point.cooksDistance - (expected.cooks[i] ?? Number.NaN))).toBeLessThan(1e-9)
      expect(Math.abs((point.studentisedResidual ?? Number.NaN) - (expected.rstudent[i] ?? Number.NaN))).toBeLessThan(1e-8)
    }
  })

  it('has the lack of fit and the bend of R\'s anova', () => {
    const test = lackOfFit({
      x: data.E, y: data.Cd, ...(data.weights === null ? {} : { weights: data.weights }),
      residualSumOfSquares: expected.sigma ** 2 * expected.df, parameters: 2,
    })
    if (expected.lack_of_fit === null) expect(test).toBeNull()
    else {
      expect(digitsOfAgreement(test?.pureErrorSumOfSquares, expected.lack_of_fit.ss_pure_error)).toBeGreaterThan(9)
      expect(digitsOfAgreement(test?.f, expected.lack_of_fit.F)).toBeGreaterThan(8)
      expect(digitsOfAgreement(test?.pValue, expected.lack_of_fit.p)).toBeGreaterThan(8)
    }
    const bend = curvatureOf(fit)
    const quadratic = fitQuadraticCurve(options)
    if (expected.quadratic === null) {
      expect(bend).toBeNull()
      expect(quadratic.kind).toBe('refused')
      return
    }
    expect(digitsOfAgreement(bend?.coefficient, expected.quadratic.coef[2] ?? Number.NaN)).toBeGreaterThan(8)
    expect(digitsOfAgreement(bend?.pValue, expected.quadratic.p_quad)).toBeGreaterThan(8)
    if (quadratic.kind === 'refused') throw new Error(quadratic.detail)
    expect(digitsOfAgreement(quadratic.bendMicrometres.value, expected.quadratic.coef[2] ?? Number.NaN)).toBeGreaterThan(8)
    expect(digitsOfAgreement(quadratic.bendMicrometres.standardError, expected.quadratic.se[2] ?? Number.NaN)).toBeGreaterThan(8)
  })

  it('has R\'s exposures for a depth, with both of Fieller\'s intervals', () => {
    expect(asList(data.targets)).toEqual(expected.inverse.map(one => one.Cd))
    for (const one of expected.inverse) {
      const answer = exposureForDepth(fit, one.Cd)
      expect(digitsOfAgreement(answer.value, one.E)).toBeGreaterThan(10)
      expectEnds(answer.meanInterval, one.fieller_mean.lnE.map(Math.exp))
      const ends = one.fieller_single_new_obs_unitweight.lnE
      if (data.weights === null) expectEnds(answer.singleInterval, ends.map(Math.exp))
      else {
        // Ours takes a new film to be read as well as the average one; R's was given weight one. Same formula, other weight.
        const variance = fit.residualStandardDeviation ** 2
        const shifted = fieller({
          numerator: one.Cd - fit.centre.meanDepthMicrometres, denominator: fit.penetrationDepthMicrometres.value,
          numeratorVariance: variance / fit.centre.sumWeights + variance, denominatorVariance: variance / fit.centre.sumSquaresLogExposure,
          covariance: 0, quantile: 2.073873067904,
        })
        expectEnds(shifted, ends.map(end => end - fit.centre.meanLogExposure), 7)
      }
    }
  })
})
