import { describe, expect, it } from 'vitest'
import { curvatureOf, depthAt, exposureForDepth, fitWorkingCurve, type FilmReading, type Interval } from '#shared/film/index.ts'
import { digitsOfAgreement } from '#tests/helpers/digits.ts'
import { readReference } from '#tests/helpers/reference.ts'

// Source: R 4.2.2, lm and its helpers, on made-up films; fixtures/reference/workingcurve_awkward.json names the functions.
interface Case {
  readonly id: number
  readonly E: readonly number[]
  readonly Cd: readonly number[]
  readonly weights: readonly number[] | null
  readonly target: number
  readonly exposure: number
}
interface Expected {
  readonly b0: number
  readonly b1: number
  readonly se_b0: number
  readonly se_b1: number
  readonly sigma: number
  readonly r2: number
  readonly Dp_lower: number
  readonly Ec: number
  readonly Ec_fieller: { readonly type: string; readonly Ec: readonly [number | string | null, number | string | null] }
  readonly E: number
  readonly E_fieller: { readonly type: string; readonly E: readonly [number | string | null, number | string | null] }
  readonly depth_confidence: readonly [number, number]
  readonly max_hat: number
  readonly max_cooks: number
  /** Minus infinity, as text, where one degree of freedom leaves none without the film. */
  readonly max_abs_rstudent: number | string
  readonly bend: number | null
  readonly bend_p: number | null
}
const { data, expected } = readReference<readonly Case[], readonly Expected[]>('workingcurve_awkward')
const cases = data.flatMap((one, i) => {
  const right = expected[i]
  return right === undefined ? [] : [{ id: one.id, films: one.E.length, levels: new Set(one.E).size, weighted: one.weights !== null, one, right }]
})

/** Double precision leaves this many digits of the worst of these sets. */
const digits = 6

function expectSet(interval: Interval, type: string, ends: readonly (number | string | null)[]): void {
  const [first, second] = ends
  // What does not fit into a number is open for us: no exposure can be shown for it.
  const representable = typeof first === 'number' && first > 0 && typeof second === 'number' && Number.isFinite(second)
  const kind = type === 'whole line' || !representable ? 'unbounded' : type
  expect(interval.kind).toBe(kind)
  const own = interval.kind === 'finite' ? [interval.lower, interval.upper] : interval.kind === 'exclusive' ? interval.roots : []
  for (const [k, end] of own.entries()) expect(digitsOfAgreement(end, Number(ends[k]))).toBeGreaterThan(digits)
}

describe('awkward working curves, as R fits them', () => {
  it('has two levels, weights, large offsets and all three kinds of Fieller sets among them', () => {
    expect(new Set(expected.map(one => one.Ec_fieller.type))).toEqual(new Set(['finite', 'exclusive', 'whole line']))
    expect(cases.filter(one => one.levels === 2).length).toBeGreaterThan(3)
    expect(cases.filter(one => one.weighted).length).toBeGreaterThan(8)
  })

  it.each(cases)('set $id: $films films at $levels exposures, weighted $weighted', ({ one, right }) => {
    const readings: FilmReading[] = one.E.map((exposure, i) => ({
      exposure, depthMicrometres: one.Cd[i] ?? Number.NaN, state: 'measured',
      ...(one.weights === null ? {} : { standardUncertaintyMicrometres: 1 / Math.sqrt(one.weights[i] ?? Number.NaN) }),
    }))
    const fit = fitWorkingCurve({ readings, exposureKind: 'mJ/cm2', weighting: one.weights === null ? 'equal' : 'stated' })
    if (fit.kind === 'refused') throw new Error(fit.detail)
    const dp = fit.penetrationDepthMicrometres
    const answer = exposureForDepth(fit, one.target)
    const depth = depthAt(fit, one.exposure).confidenceInterval
    if (dp.interval.kind !== 'finite' || depth.kind !== 'finite') throw new Error('finite')
    const pairs: readonly (readonly [string, number, number])[] = [
      ['Dp', dp.value, right.b1], ['its standard error', dp.standardError, right.se_b1], ['its lower end', dp.interval.lower, right.Dp_lower],
      ['intercept', fit.interceptMicrometres.value, right.b0], ['its standard error', fit.interceptMicrometres.standardError, right.se_b0],
      ['scatter', fit.residualStandardDeviation, right.sigma], ['R²', fit.rSquared, right.r2],
      ['Ec', fit.criticalExposure.value, right.Ec], ['exposure for the target', answer.value, right.E],
      ['depth, lower end', depth.lower, right.depth_confidence[0]], ['depth, upper end', depth.upper, right.depth_confidence[1]],
      ['largest leverage', Math.max(...fit.leverages), right.max_hat], ['largest Cook', Math.max(...fit.cooksDistances), right.max_cooks],
    ]
    for (const [name, own, theirs] of pairs) expect(digitsOfAgreement(own, theirs), name).toBeGreaterThan(digits)
    const studentised = fit.points.map(point => point.studentisedResidual)
    if (fit.degreesOfFreedom === 1) expect(studentised.every(value => value === null)).toBe(true)
    else expect(digitsOfAgreement(Math.max(...studentised.map(value => Math.abs(value ?? 0))), Number(right.max_abs_rstudent))).toBeGreaterThan(digits)
    expectSet(fit.criticalExposure.interval, right.Ec_fieller.type, right.Ec_fieller.Ec)
    expectSet(answer.meanInterval, right.E_fieller.type, right.E_fieller.E)
    const bend = curvatureOf(fit)
    if (right.bend === null) expect(bend).toBeNull()
    else if (bend !== null) {
      expect(digitsOfAgreement(bend.coefficient, right.bend)).toBeGreaterThan(digits)
      expect(digitsOfAgreement(bend.pValue, right.bend_p ?? Number.NaN)).toBeGreaterThan(digits)
    }
  })
})
