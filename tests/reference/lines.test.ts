import { describe, expect, it } from 'vitest'
import { fitWorkingCurveYork, type FilmReading } from '#shared/film/index.ts'
import { fieller, fitStraightLine, fitYork, lackOfFit, leastSquares } from '#shared/stats/index.ts'
import { digitsOfAgreement } from '#tests/helpers/digits.ts'
import { readReference } from '#tests/helpers/reference.ts'

interface York {
  readonly intercept: number
  readonly slope: number
  readonly se_intercept: number
  readonly se_slope: number
  readonly cov_ab: number
  readonly chi2: number
  readonly df: number
  readonly mswd: number
  readonly p_chi2: number
  readonly adjusted_x: readonly number[]
}

function expectYork(fit: ReturnType<typeof fitYork>, expected: York): void {
  if (fit.kind === 'refused') throw new Error(fit.detail)
  const pairs = [
    [fit.intercept, expected.intercept], [fit.slope, expected.slope], [fit.interceptStandardError, expected.se_intercept],
    [fit.slopeStandardError, expected.se_slope], [fit.covariance, expected.cov_ab], [fit.chiSquare, expected.chi2],
    [fit.mswd, expected.mswd], [fit.pValue, expected.p_chi2],
  ] as const
  for (const [own, right] of pairs) expect(digitsOfAgreement(own, right)).toBeGreaterThan(10)
  for (const [i, x] of fit.adjustedX.entries()) expect(x).toBeCloseTo(expected.adjusted_x[i] ?? Number.NaN, 10)
  expect(fit.degreesOfFreedom).toBe(expected.df)
}

describe('Pearson\'s data with York\'s weights (York et al., Am. J. Phys. 72 (2004) 367)', () => {
  const { data, expected } = readReference<
    { readonly X: number[]; readonly Y: number[]; readonly wX: number[]; readonly wY: number[] },
    { readonly published: { readonly intercept: number; readonly slope: number; readonly chi2: number }; readonly recomputed: York; readonly with_correlated_errors: readonly (York & { readonly r: number })[] }
  >('eiv_york_pearson')
  const fit = (correlation: number) => fitYork({
    x: data.X, y: data.Y,
    xStandardUncertainties: data.wX.map(weight => 1 / Math.sqrt(weight)),
    yStandardUncertainties: data.wY.map(weight => 1 / Math.sqrt(weight)),
    correlations: data.X.map(() => correlation),
  })

  it('gives the published line', () => {
    const line = fit(0)
    if (line.kind === 'refused') throw new Error(line.detail)
    expect(line.intercept).toBeCloseTo(expected.published.intercept, 8)
    expect(line.slope).toBeCloseTo(expected.published.slope, 9)
    expect(line.chiSquare).toBeCloseTo(expected.published.chi2, 7)
  })
  it('gives all digits of the recomputed one', () => expectYork(fit(0), expected.recomputed))
  it.each(expected.with_correlated_errors)('with errors correlated by $r', one => expectYork(fit(one.r), one))
})

describe('made-up working curve with uncertain exposures (R 4.2.2, York\'s equations)', () => {
  const { data, expected } = readReference<
    { readonly lnE: number[]; readonly Cd: number[]; readonly s_lnE: number[]; readonly s_Cd: number[]; readonly r: number[] },
    Readonly<Record<'with_r' | 'r0', York & { readonly Ec: number; readonly lnEc: number; readonly se_lnEc: number }>>
  >('eiv_workingcurve_madeup')
  const readings: FilmReading[] = data.lnE.map((x, i) => ({
    exposure: Math.exp(x), depthMicrometres: data.Cd[i] ?? 0, standardUncertaintyMicrometres: data.s_Cd[i] ?? 0, state: 'measured',
  }))

  it.each([['with_r', 0.3], ['r0', 0]] as const)('%s', (key, correlation) => {
    const right = expected[key]
    const fit = fitWorkingCurveYork({ readings, exposureKind: 'mJ/cm2', exposureRelativeUncertainty: 0.04, correlation })
    if (fit.kind === 'refused') throw new Error(fit.detail)
    expectYork(fit.line, right)
    expect(digitsOfAgreement(fit.criticalExposure.value, right.Ec)).toBeGreaterThan(10)
    const widening = Math.max(1, right.mswd)
    expect(digitsOfAgreement(fit.criticalExposure.standardError, right.Ec * right.se_lnEc * Math.sqrt(widening))).toBeGreaterThan(8)
    expect(fit.widened).toBe(right.mswd > 1)
  })
})

describe('Fieller\'s sets of a ratio (Fieller, JRSS B 16 (1954) 175)', () => {
  const { data, expected } = readReference<
    readonly { readonly a: number; readonly b: number; readonly vaa: number; readonly vbb: number; readonly vab: number; readonly t: number }[],
    readonly { readonly type: string; readonly roots: readonly [number, number] | null }[]
  >('fieller')
  it.each(data.map((one, i) => ({ ...one, right: expected[i] })))('of $a / $b with t $t', ({ a, b, vaa, vbb, vab, t, right }) => {
    const set = fieller({ numerator: a, denominator: b, numeratorVariance: vaa, denominatorVariance: vbb, covariance: vab, quantile: t })
    const ends = set.kind === 'finite' ? [set.lower, set.upper] : set.kind === 'exclusive' ? set.roots : null
    expect({ finite: 'finite', exclusive: 'exclusive', unbounded: 'whole line' }[set.kind]).toBe(right?.type)
    if (right?.roots === null || right === undefined) expect(ends).toBeNull()
    else for (const k of [0, 1] as const) expect(digitsOfAgreement(ends?.[k], right.roots[k])).toBeGreaterThan(10)
  })
})

describe('lack of fit against replicates (NIST/SEMATECH e-Handbook, load cell and line-width calibrations)', () => {
  interface Fit {
    readonly degree: number
    readonly coef: readonly number[]
    readonly se: readonly number[]
    readonly ss_pure: number
    readonly df_pure: number
    readonly df_lof: number
    readonly p: number
  }
  const { data, expected } = readReference<
    Readonly<Record<'pontius' | 'loadcell' | 'linewidth', { readonly x: number[]; readonly y: number[] }>>,
    { readonly exact_rational: Readonly<Record<string, number>>; readonly computed: Readonly<Record<string, Fit>> }
  >('lackoffit_nist_handbook')

  it.each([
    ['pontius', 'pontius_line', 'pontius_line_F'], ['pontius', 'pontius_quad', 'pontius_quad_F'],
    ['loadcell', 'loadcell_line', 'loadcell_line_F'], ['loadcell', 'loadcell_quad', 'loadcell_quad_F'],
    ['linewidth', 'calibration_line', 'linewidth_F'],
  ] as const)('%s: %s', (set, name, exactName) => {
    const { x, y } = data[set]
    const right = expected.computed[name]
    if (right === undefined) throw new Error(`${name} is missing`)
    const fit = leastSquares({ design: x.map(value => Array.from({ length: right.degree + 1 }, (_, power) => value ** power)), y })
    if (fit.kind === 'refused') throw new Error(fit.detail)
    for (const [k, coefficient] of right.coef.entries()) {
      expect(digitsOfAgreement(fit.coefficients[k], coefficient)).toBeGreaterThan(9)
      expect(digitsOfAgreement(fit.standardErrors[k], right.se[k] ?? Number.NaN)).toBeGreaterThan(9)
    }
    const test = lackOfFit({ x, y, residualSumOfSquares: fit.residualSumOfSquares, parameters: right.degree + 1 })
    expect(test?.pureErrorDegreesOfFreedom).toBe(right.df_pure)
    expect(test?.lackOfFitDegreesOfFreedom).toBe(right.df_lof)
    expect(digitsOfAgreement(test?.pureErrorSumOfSquares, right.ss_pure)).toBeGreaterThan(10)
    // Exact rational arithmetic; the small lack of fit of the parabolas is a difference of near-equal sums.
    expect(digitsOfAgreement(test?.f, expected.exact_rational[exactName] ?? Number.NaN)).toBeGreaterThan(8)
    expect(digitsOfAgreement(test?.pValue, right.p)).toBeGreaterThan(8)
  })
})

describe('one-way analysis of variance (NIST StRD): pure error is what replicates leave', () => {
  interface Anova {
    readonly name: string
    readonly certified: { readonly ss_within: number; readonly df_within: number }
    readonly exact: { readonly ss_within: string; readonly F: string }
  }
  const { data, expected } = readReference<
    readonly { readonly name: string; readonly type: string; readonly treatment?: readonly number[]; readonly y: readonly number[] }[], readonly Anova[]
  >('nist_strd_univariate_anova')
  /** SmLs07 has 13 equal leading digits, so that its data themselves are off by 1e-4 of their spread in double precision. */
  const required: Readonly<Record<string, number>> = { SmLs07: 3, SmLs04: 8, AtmWtAg: 8 }
  const cases = data.flatMap((set, i) => {
    const right = expected[i]
    return set.treatment === undefined || right === undefined ? [] : [{ name: set.name, x: set.treatment, y: set.y, right }]
  })

  it.each(cases)('$name', ({ name, x, y, right }) => {
    // With the mean as the only parameter, lack of fit is the effect of the treatments.
    const mean = y.reduce((sum, value) => sum + (value - (y[0] ?? 0)), 0) / y.length + (y[0] ?? 0)
    const total = y.reduce((sum, value) => sum + (value - mean) ** 2, 0)
    const test = lackOfFit({ x, y, residualSumOfSquares: total, parameters: 1 })
    expect(test?.pureErrorDegreesOfFreedom).toBe(right.certified.df_within)
    expect(digitsOfAgreement(test?.pureErrorSumOfSquares, Number(right.exact.ss_within))).toBeGreaterThan(required[name] ?? 9)
    expect(digitsOfAgreement(test?.f, Number(right.exact.F))).toBeGreaterThan(required[name] ?? 9)
  })
})

describe('reciprocity: depth on ln irradiance and ln time (R 4.2.2, made-up data)', () => {
  const { data, expected } = readReference<
    { readonly I: number[]; readonly t: number[]; readonly Cd: number[] },
    { readonly coef: number[]; readonly se: number[]; readonly cov: number[][]; readonly sigma: number; readonly df: number; readonly m: number; readonly m_fieller: [number, number] }
  >('workingcurve_reciprocity_madeup')

  it('gives the exponent, the ratio of both slopes, with Fieller\'s interval', () => {
    const fit = leastSquares({ design: data.I.map((irradiance, i) => [1, Math.log(irradiance), Math.log(data.t[i] ?? 1)]), y: data.Cd })
    if (fit.kind === 'refused') throw new Error(fit.detail)
    for (const k of [0, 1, 2]) {
      expect(digitsOfAgreement(fit.coefficients[k], expected.coef[k] ?? Number.NaN)).toBeGreaterThan(9)
      expect(digitsOfAgreement(fit.standardErrors[k], expected.se[k] ?? Number.NaN)).toBeGreaterThan(9)
    }
    expect(digitsOfAgreement(fit.residualStandardDeviation, expected.sigma)).toBeGreaterThan(9)
    const at = (i: number, j: number) => fit.covariance[i]?.[j] ?? Number.NaN
    const [numerator = 0, denominator = 0] = fit.coefficients.slice(1)
    // t 0.975 with 29 degrees of freedom.
    const set = fieller({ numerator, denominator, numeratorVariance: at(1, 1), denominatorVariance: at(2, 2), covariance: at(1, 2), quantile: 2.045229642132703 })
    expect(digitsOfAgreement(numerator / denominator, expected.m)).toBeGreaterThan(9)
    if (set.kind !== 'finite') throw new Error('finite')
    expect(digitsOfAgreement(set.lower, expected.m_fieller[0])).toBeGreaterThan(8)
    expect(digitsOfAgreement(set.upper, expected.m_fieller[1])).toBeGreaterThan(8)
  })
})

describe('Pearson\'s data by ordinary least squares (R 4.2.2, lm)', () => {
  const { data, expected } = readReference<{ readonly X: number[]; readonly Y: number[] }, { readonly ols: { readonly intercept: number; readonly slope: number; readonly se: readonly number[] } }>('eiv_york_pearson')
  it('gives R\'s line', () => {
    const line = fitStraightLine({ x: data.X, y: data.Y })
    expect(digitsOfAgreement(line.intercept, expected.ols.intercept)).toBeGreaterThan(12)
    expect(digitsOfAgreement(line.slope, expected.ols.slope)).toBeGreaterThan(12)
  })
})
